"""Tables whose columns have types: Arrow streams and Parquet files.

pyarrow is large, so it is loaded with the first such table, or beside the start of a server.
"""

from collections.abc import Callable
from importlib import import_module
from typing import Any

from service.formats.arrow.loading import load_beside

_DECODE, _ENCODE = "service.formats.arrow.decode", "service.formats.arrow.encode"


def later(module: str, name: str) -> Callable[..., Any]:
    """What a module makes, without loading it before the first call."""

    def make(*given: object, **named: object) -> Any:
        return getattr(import_module(module), name)(*given, **named)

    return make


def load_ahead() -> None:
    """Load it now, beside everything else, so that no request waits for it."""
    load_beside(_DECODE, _ENCODE)


ArrowDecoder = later(_DECODE, "ArrowDecoder")
ParquetDecoder = later(_DECODE, "ParquetDecoder")
ArrowEncoder = later(_ENCODE, "ArrowEncoder")
ParquetEncoder = later(_ENCODE, "ParquetEncoder")
