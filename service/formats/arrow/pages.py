"""What the pages of a Parquet file promise, before memory is taken for them.

A column chunk is a row of pages, each behind a header that says how long it is, packed and
unpacked, and how many values it holds (Apache Parquet, parquet.thrift, PageHeader). A page is
unpacked whole; so is what one row holds, and what a dictionary stands for.
"""

from collections.abc import Iterator, Sequence
from dataclasses import dataclass

import pyarrow.parquet as pq

from service.formats.arrow.bounded import ROWS
from service.formats.arrow.thrift import Compact, Unfit
from service.formats.errors import FormatError, RecordTooLong

MOST_BYTES = 64 << 20
"""Of the largest pages of all columns together, unpacked: so many are held at a time."""
MOST_VALUES = 1 << 24
"""Of a column of lists, in one row group: all of them may be in one row."""
MOST_FIXED = 4096
"""Bytes of a value of fixed length."""
SHORT_DICTIONARY = 2048
"""Bytes of a dictionary whose longest entry may stand in every row of a block."""
MOST_WRITTEN = 256 << 20
"""Bytes of text that the values of a nested column may be, all of them its longest entry."""
MOST_PAGES = 1_000_000

DICTIONARY_PAGE = 2
KIND, UNPACKED, PACKED, DATA, DICTIONARY, DATA_2 = 1, 2, 3, 5, 7, 8
"""Fields of a page header; in those of the headers within, the first is the number of values."""


@dataclass(frozen=True, slots=True)
class Page:
    """What a page header says."""

    unpacked: int
    values: int
    is_dictionary: bool


def check_pages(data: memoryview, metadata: pq.FileMetaData) -> list[str]:
    """Names of the columns of text whose dictionaries are too long to be written out at once.

    Raises RecordTooLong where reading the file would take more memory than it may, FormatError
    where a page header cannot be read.
    """
    largest: dict[int, int] = {}
    long: dict[str, None] = {}
    count = 0
    for group in range(metadata.num_row_groups):
        for place in range(metadata.num_columns):
            column, chunk = metadata.schema.column(place), metadata.row_group(group).column(place)
            pages = []
            for page in _pages(data, chunk, column.path):
                count += 1
                if count > MOST_PAGES:
                    raise _too_much(f"at most {MOST_PAGES} pages", "more", column.path, group)
                pages.append(page)
            largest[place] = max(largest.get(place, 0), *(page.unpacked for page in pages), 0)
            if sum(largest.values()) > MOST_BYTES:
                raise _too_much(
                    f"at most {MOST_BYTES} bytes in the largest pages of all columns together",
                    f"{sum(largest.values())} so far", column.path, group,
                )  # fmt: skip
            _check_values(column, pages, group)
            if _is_flat_text(column) and _entries(pages) > SHORT_DICTIONARY:
                long[column.path] = None
    return list(long)


def _check_values(column: pq.ColumnSchema, pages: Sequence[Page], group: int) -> None:
    """Refuse what a few bytes may make long: values of lists, of fixed length, of dictionaries."""
    values = sum(page.values for page in pages)
    lists = column.max_repetition_level > 0
    if (column.length or 0) > MOST_FIXED:
        raise _too_much(f"values of at most {MOST_FIXED} bytes", f"{column.length}", column.path,
                        group)  # fmt: skip
    if lists and values > MOST_VALUES:
        raise _too_much(f"at most {MOST_VALUES} values of a list column in a row group",
                        f"{values}", column.path, group)  # fmt: skip
    if column.physical_type == "BYTE_ARRAY" and not _is_flat_text(column):
        written = _entries(pages) * (values if lists else min(values, ROWS))
        if written > MOST_WRITTEN:
            raise _too_much(f"at most {MOST_WRITTEN} bytes of text in a nested column",
                            f"up to {written}", column.path, group)  # fmt: skip


def _is_flat_text(column: pq.ColumnSchema) -> bool:
    return bool(column.physical_type == "BYTE_ARRAY" and column.path == column.name)


def _entries(pages: Sequence[Page]) -> int:
    """Bytes of the dictionary of a column chunk."""
    return sum(page.unpacked for page in pages if page.is_dictionary)


def _pages(data: memoryview, chunk: pq.ColumnChunkMetaData, name: str) -> Iterator[Page]:
    start = chunk.data_page_offset
    if chunk.has_dictionary_page and 0 < chunk.dictionary_page_offset < start:
        start = chunk.dictionary_page_offset
    end, left = start + chunk.total_compressed_size, chunk.num_values
    at = start
    while at < end and left > 0:
        try:
            reader = Compact(data, at)
            page, packed = _told(reader.structure())
        except Unfit as error:
            raise FormatError(
                "a Parquet file", f"a page header at byte {at} that cannot be read: {error}",
                column=name,
            ) from None  # fmt: skip
        yield page
        left -= 0 if page.is_dictionary else page.values
        at = reader.at + packed


def _told(header: dict[int, object]) -> tuple[Page, int]:
    """A page, and how many bytes it takes in the file."""
    unpacked, packed = header.get(UNPACKED), header.get(PACKED)
    if not isinstance(unpacked, int) or not isinstance(packed, int) or min(unpacked, packed) < 0:
        raise Unfit("no sizes")
    within = next((header[n] for n in (DATA, DICTIONARY, DATA_2) if n in header), {})
    values = within.get(1, 0) if isinstance(within, dict) else 0
    if values < 0:
        raise Unfit("less than no values")
    is_dictionary = header.get(KIND) == DICTIONARY_PAGE
    return Page(unpacked, 0 if is_dictionary else values, is_dictionary), packed


def _too_much(most: str, found: str, name: str, group: int) -> RecordTooLong:
    return RecordTooLong(
        most, found, column=name,
        mend=f"so it is in row group {group + 1}; write smaller pages and row groups, or send the "
        "table as CSV",
    )  # fmt: skip
