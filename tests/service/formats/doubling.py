"""An answer that is easy to check, for the tests of tables: the permittivity, doubled."""

import csv
import io
import json

import numpy as np

from service.batch import Conversion
from service.formats import FORMATS
from service.formats.block import Answer

NAMES = ("water_content",)


def doubled(block):
    permittivity = block.values.get("apparent_permittivity", np.full(len(block), np.nan))
    return Answer({"water_content": 2.0 * permittivity}, block.readings({}).flags)


def conversion(into, out, *, strict=False, answer=doubled, **limits):
    decoder = FORMATS[into].decoder(NAMES, **limits)
    return Conversion(decoder, FORMATS[out].encoder(), answer, strict=strict)


def converted(body, into="csv", out=None, **options):
    """Bytes of the answer to a body, or to its pieces."""
    pieces = [body] if isinstance(body, bytes) else body
    work = conversion(into, out or into, **options)
    parts = [part for piece in pieces for part in work.feed(piece)]
    return b"".join([*parts, *work.close()])


def csv_rows(body):
    return list(csv.reader(io.StringIO(body.decode(), newline="")))


def json_rows(body):
    *lines, rest = body.decode().split("\n")
    assert rest == ""
    return [json.loads(line) for line in lines]


def cut(body, places):
    """The body in pieces, cut at some places."""
    ends = sorted(place % (len(body) + 1) for place in places)
    return [body[a:b] for a, b in zip([0, *ends], [*ends, len(body)], strict=True)]
