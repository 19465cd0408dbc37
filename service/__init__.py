"""The HTTP service: routes, formats, keys, pages."""

__version__ = "0.1.0"
