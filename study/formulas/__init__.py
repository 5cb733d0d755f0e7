"""Foundation: pure functions, one module for each standard or subject."""
