"""Limit kinds, states, deadband and off-delay, exceedance episodes."""
