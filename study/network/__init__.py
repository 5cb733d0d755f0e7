"""Room 3: one operating mode as numbers."""
