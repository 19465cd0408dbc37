"""Decisions over HTTP: bodies checked, defaults settled, answers laid out."""
