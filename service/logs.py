"""Log lines on standard error: text for a person, JSON for a machine, one shape for all of them."""

import json
import logging
from datetime import UTC, datetime
from typing import Any, Literal

COMMON = ("request_id", "milliseconds", "bytes", "key")


class TextLines(logging.Formatter):
    """Time, level, message, then what else is known as name=value."""

    def format(self, record: logging.LogRecord) -> str:
        """One line; a traceback follows on lines of its own."""
        known = getattr(record, "fields", {})
        more = "".join(f" {name}={known[name]}" for name in COMMON if known.get(name) is not None)
        text = f"{_time(record)} {record.levelname.lower()} {record.getMessage()}{more}"
        return f"{text}\n{self.formatException(record.exc_info)}" if record.exc_info else text


class JsonLines(logging.Formatter):
    """One JSON object a line, tracebacks included."""

    def format(self, record: logging.LogRecord) -> str:
        """One line."""
        line: dict[str, Any] = {
            "time": _time(record),
            "level": record.levelname.lower(),
            "logger": record.name,
            "message": record.getMessage(),
            **getattr(record, "fields", {}),
        }
        if record.exc_info:
            line["traceback"] = self.formatException(record.exc_info)
        return json.dumps(line, default=str)


def logging_config(log_format: Literal["text", "json"]) -> dict[str, Any]:
    """For logging.config.dictConfig: everything, the server's own lines included."""
    kind = JsonLines if log_format == "json" else TextLines
    return {
        "version": 1,
        "disable_existing_loggers": False,
        "formatters": {"lines": {"()": kind}},
        "handlers": {"stderr": {"class": "logging.StreamHandler", "formatter": "lines"}},
        "root": {"level": "WARNING", "handlers": ["stderr"]},
        "loggers": {"gleyline": {"level": "INFO"}, "py.warnings": {"level": "WARNING"}},
    }


def _time(record: logging.LogRecord) -> str:
    moment = datetime.fromtimestamp(record.created, UTC)
    return moment.isoformat(timespec="milliseconds").replace("+00:00", "Z")
