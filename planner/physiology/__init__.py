"""Published formulas as pure functions on numpy arrays."""
