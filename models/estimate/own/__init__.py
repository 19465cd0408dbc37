"""The error of a mixing model itself, at a reading of a soil."""
