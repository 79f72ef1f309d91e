"""Drivers, places, rounds, itineraries, and the search over them."""
