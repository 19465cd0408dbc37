"""Readings as loggers post them, checked row by row, as batches for the store."""
