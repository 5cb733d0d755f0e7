"""The tests: a mirror of the package, and checks against what others published."""
