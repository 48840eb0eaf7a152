"""Airfield Board: which types may depart now, by density altitude."""

__version__ = "0.1.0"
