"""Session drinks plans, weighings and the day's water."""
