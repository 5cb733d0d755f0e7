"""Room 6: results and verdicts shown; computes nothing."""
