"""Filled lines and cells seen from one end."""
