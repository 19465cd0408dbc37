"""What the messages of an Arrow stream promise, before memory is taken for it.

A message is a flatbuffer and a body (Apache Arrow, columnar format 1.4, "Encapsulated message
format" and Message.fbs). Its record batch lists the buffers of the body; where they are
compressed, each begins with the length it will have.
"""

import struct
from collections.abc import Iterator

import pyarrow as pa

from service.formats.errors import RecordTooLong

MOST_BYTES = 64 << 20
"""Of one compressed record batch, unpacked."""
MOST_ROWS = 1 << 26
"""Of one record batch: some columns take no bytes at all."""
DICTIONARY, RECORD_BATCH = 2, 3


def check_messages(whole: pa.Buffer) -> None:
    """Raise RecordTooLong where a record batch would take more memory than it may."""
    reader = pa.ipc.MessageReader.open_stream(whole)
    for number, message in enumerate(_messages(reader)):
        if message.body is None:
            continue
        rows, unpacked = _promised(memoryview(message.metadata), memoryview(message.body))
        if unpacked > MOST_BYTES or rows > MOST_ROWS:
            raise RecordTooLong(
                f"at most {MOST_ROWS} rows and {MOST_BYTES} bytes in a record batch that is "
                "compressed",
                f"{rows} rows, {unpacked} bytes",
                line=number,
                mend="write smaller record batches; the number is that of the message",
            )


def _messages(reader: pa.MessageReader) -> Iterator[pa.Message]:
    while True:
        try:
            yield reader.read_next_message()
        except StopIteration:
            return


def _promised(message: memoryview, body: memoryview) -> tuple[int, int]:
    """Rows of a record batch, and the bytes its compressed buffers unpack to."""
    root = _offset(message, 0)
    kind = _field(message, root, 1)
    place = _field(message, root, 2)
    if not kind or not place or message[kind] not in {DICTIONARY, RECORD_BATCH}:
        return 0, 0
    batch = _offset(message, place)
    if message[kind] == DICTIONARY:
        batch = _offset(message, _field(message, batch, 1))
    at = _field(message, batch, 0)
    rows = struct.unpack_from("<q", message, at)[0] if at else 0
    listed, packed = _field(message, batch, 2), _field(message, batch, 3)
    if not listed or not packed:
        return rows, 0
    start = _offset(message, listed)
    (count,) = struct.unpack_from("<I", message, start)
    unpacked = 0
    for buffer in range(count):
        begin, length = struct.unpack_from("<qq", message, start + 4 + 16 * buffer)
        if length >= 8:
            unpacked += max(0, struct.unpack_from("<q", body, begin)[0])
    return rows, unpacked


def _offset(message: memoryview, place: int) -> int:
    """Where the reference at a place leads."""
    (step,) = struct.unpack_from("<I", message, place)
    return place + int(step)


def _field(message: memoryview, table: int, number: int) -> int:
    """Where a field of a flatbuffer table lies; 0 where it is left out."""
    (back,) = struct.unpack_from("<i", message, table)
    entries = table - int(back)
    (size,) = struct.unpack_from("<H", message, entries)
    entry = 4 + 2 * number
    if entry + 2 > size:
        return 0
    (at,) = struct.unpack_from("<H", message, entries + entry)
    return table + int(at) if at else 0
