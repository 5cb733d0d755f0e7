"""Room 2: what the plant is."""
