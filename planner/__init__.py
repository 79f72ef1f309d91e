"""Brings racing drivers through rounds that lie high above sea level."""

__version__ = "0.1.0"
