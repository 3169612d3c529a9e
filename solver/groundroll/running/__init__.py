"""From a scenario to its records: plan, set-up, the time loop and its observers."""
