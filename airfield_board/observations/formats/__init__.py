"""Observation formats: one module each; the format of a file is recognised from its content."""
