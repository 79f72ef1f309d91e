"""Domain objects or frames to charts."""
