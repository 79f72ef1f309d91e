"""The use cases: what a page or a command calls."""
