"""Samples in a line, seen from both ends."""
