"""What a trace means: peaks, derivatives, misfits. Knows neither the mesh nor files."""
