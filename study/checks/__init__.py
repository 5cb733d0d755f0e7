"""Room 5: result against limit."""
