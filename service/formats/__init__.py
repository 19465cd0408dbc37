"""The table formats a batch is read and written in, by short name and by media type.

A format is one file with a decoder and an encoder, and one entry here.
"""

from collections.abc import Callable, Collection, Mapping
from dataclasses import dataclass
from types import MappingProxyType
from typing import Protocol

from models.registry import Registry
from service.formats import arrow, csv_rows, ndjson_rows
from service.formats.block import Decoder, Encoder


class MakeDecoder(Protocol):
    """What makes the decoder of one table."""

    def __call__(
        self, appends: Collection[str], *, block_bytes: int = ..., line_bytes: int = ...
    ) -> Decoder:
        """appends: names of the columns of the answer, without the flags.

        block_bytes: part of a table that is computed at once; line_bytes: longest record.
        """
        ...


@dataclass(frozen=True, slots=True)
class Format:
    """One table format."""

    key: str
    """Its short name, as ``?format=`` takes it."""
    media_type: str
    suffix: str
    """Of the name of a file that holds it."""
    decoder: MakeDecoder
    encoder: Callable[[], Encoder]


FORMATS: Registry[Format] = Registry(
    "format",
    Format(csv_rows.KEY, "text/csv", ".csv", csv_rows.CsvDecoder, csv_rows.CsvEncoder),
    Format(
        ndjson_rows.KEY,
        "application/x-ndjson",
        ".ndjson",
        ndjson_rows.NdjsonDecoder,
        ndjson_rows.NdjsonEncoder,
    ),
    Format(
        "arrow",
        "application/vnd.apache.arrow.stream",
        ".arrows",
        arrow.ArrowDecoder,
        arrow.ArrowEncoder,
    ),
    Format(
        "parquet",
        "application/vnd.apache.parquet",
        ".parquet",
        arrow.ParquetDecoder,
        arrow.ParquetEncoder,
    ),
)

MEDIA_TYPES: Mapping[str, str] = MappingProxyType(
    {key: format_.media_type for key, format_ in FORMATS.items()}
)
"""Media types by short name, the preferred one first."""


def format_of(content_type: str) -> Format | None:
    """The format of a Content-Type, whatever its parameters; None where it is no table."""
    media_type = content_type.partition(";")[0].strip().lower()
    return next((f for f in FORMATS.values() if f.media_type == media_type), None)
