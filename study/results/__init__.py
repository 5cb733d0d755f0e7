"""The hinge: one frozen dataclass for each analysis, ids as tuples, values as read-only arrays.

Checks and report read these and never a solver, so a report can be tested from made-up results.
"""
