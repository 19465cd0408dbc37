"""The command `gleyline convert`: the batch route without a server, same code, same numbers."""

from service.convert.command import convert

__all__ = ["convert"]
