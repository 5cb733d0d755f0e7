"""Room 4: one question a module."""
