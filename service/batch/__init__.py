"""A table of any length in, the same rows with their answers out: by HTTP and from files."""

from service.batch.conversion import PIECE, Conversion, Counts, convert_file
from service.batch.response import SpooledResponse
from service.batch.spool import Spool
from service.batch.stream import Stages, convert_stream

__all__ = [
    "PIECE",
    "Conversion",
    "Counts",
    "Spool",
    "SpooledResponse",
    "Stages",
    "convert_file",
    "convert_stream",
]
