"""Uncertainty of any measurand: this room knows no soil."""
