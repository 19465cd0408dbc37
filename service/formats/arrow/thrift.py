"""As much of Thrift's compact protocol as tells the numbers of a structure.

Apache Thrift, "Thrift compact protocol" (specification): a field begins with the distance to the
number of the one before and its type; whole numbers are varints, zigzag where they have a sign.
"""

from typing import Any

TRUE, FALSE, BYTE, I16, I32, I64, DOUBLE, BINARY, LIST, SET, MAP, STRUCT = range(1, 13)
DEEPEST = 16
"""Structures within structures."""
MOST_FIELDS = 10_000
"""Of one structure, with all that is in it."""


class Unfit(ValueError):
    """The bytes are no such structure."""


class Compact:
    """Reads structures from a place of some bytes. What lies behind their end is Unfit."""

    def __init__(self, data: memoryview, at: int = 0) -> None:
        self.data, self.at = data, at
        self._fields = 0

    def structure(self, depth: int = 0) -> dict[int, Any]:
        """Whole numbers and structures by the number of their field; other values are passed."""
        if depth > DEEPEST:
            raise Unfit("structures nested too deeply")
        found: dict[int, Any] = {}
        number = 0
        while head := self._byte():
            self._fields += 1
            if self._fields > MOST_FIELDS:
                raise Unfit("too many fields")
            kind, step = head & 15, head >> 4
            number = number + step if step else self._signed()
            value = self._value(kind, depth)
            if value is not None:
                found[number] = value
        return found

    def _value(self, kind: int, depth: int) -> Any:
        if kind in {TRUE, FALSE}:
            return kind == TRUE
        if kind in {I16, I32, I64}:
            return self._signed()
        if kind == STRUCT:
            return self.structure(depth + 1)
        if kind == BYTE:
            self._pass(1)
        elif kind == DOUBLE:
            self._pass(8)
        elif kind == BINARY:
            self._pass(self._varint())
        else:
            raise Unfit(f"a value of kind {kind}")
        return None

    def _byte(self) -> int:
        if not 0 <= self.at < len(self.data):
            raise Unfit("the end of the bytes")
        self.at += 1
        return self.data[self.at - 1]

    def _varint(self) -> int:
        value = shift = 0
        while shift < 70:
            byte = self._byte()
            value |= (byte & 127) << shift
            if byte < 128:
                return value
            shift += 7
        raise Unfit("a number of too many bytes")

    def _signed(self) -> int:
        value = self._varint()
        return (value >> 1) ^ -(value & 1)

    def _pass(self, count: int) -> None:
        self.at += count
        if self.at > len(self.data):
            raise Unfit("the end of the bytes")
