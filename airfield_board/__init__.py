"""Airfield Board: which types may depart now, by density altitude."""

__version__ = "0.1.0"

ADVISES = "The program advises; the flight manual, local orders and the licensed people on duty decide."
"""What every report, table and page of the program's own bears."""
