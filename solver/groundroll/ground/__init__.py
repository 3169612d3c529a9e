"""What the scenario says about the ground, as properties sampled on a mesh."""
