"""A table of any length in, the same rows with their answers out: by HTTP and from files."""

from service.batch.conversion import PIECE, Conversion, Counts, Stages, convert_file
from service.batch.response import SpooledResponse
from service.batch.stream import convert_stream, deadline
from service.formats.spool import Spool

__all__ = [
    "PIECE",
    "Conversion",
    "Counts",
    "Spool",
    "SpooledResponse",
    "Stages",
    "convert_file",
    "convert_stream",
    "deadline",
]
