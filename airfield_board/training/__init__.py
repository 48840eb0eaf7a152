"""Invented fields that feed themselves."""
