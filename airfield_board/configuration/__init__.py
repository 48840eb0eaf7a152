"""Airfield profile and fleet: models, YAML with file and line in every error, JSON Schema."""
