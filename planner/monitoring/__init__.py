"""Readings, the range expected for a driver, and the outcome of a reading."""
