"""Standard atmosphere, moist air, altimetry and their uncertainty: pure numpy, SI, no files, no clock."""
