"""Every option of the service, by command line or environment variable, with its default."""

import difflib
import os
import sys
from collections.abc import Iterator, Mapping
from ipaddress import ip_address
from pathlib import Path
from typing import Literal

from pydantic import Field, ValidationError
from pydantic_settings import BaseSettings, SettingsConfigDict

from service.faults import problems_of

PREFIX = "GLEYLINE_"
MIB = 1024 * 1024


class SettingsError(ValueError):
    """An option has a value that the service cannot start with."""


def data_folder() -> Path:
    """The folder for data of this user, where the system keeps such folders."""
    home = Path.home()
    if sys.platform == "win32":
        base = Path(os.environ.get("LOCALAPPDATA", home / "AppData" / "Local"))
    elif sys.platform == "darwin":
        base = home / "Library" / "Application Support"
    else:
        base = Path(os.environ.get("XDG_DATA_HOME") or home / ".local" / "share")
    return base / "gleyline"


class Settings(BaseSettings):
    """Options; each is also the environment variable GLEYLINE_<OPTION>."""

    model_config = SettingsConfigDict(env_prefix=PREFIX, frozen=True, extra="forbid")

    host: str = Field(default="127.0.0.1", min_length=1, description="address to listen on")
    port: int = Field(
        default=8000, ge=0, le=65535, description="port to listen on; 0: any free one"
    )
    data: Path = Field(default_factory=data_folder, description="folder of keys and data")
    database_url: str = Field(
        default="", repr=False,
        description="postgresql://user@host/name; empty: one SQLite file in the data folder",
    )  # fmt: skip
    workers: int = Field(default=1, ge=1, le=64, description="server processes")
    log_format: Literal["text", "json"] = Field(
        default="text", description="how log lines are written"
    )
    json_body_bytes: int = Field(default=4 * MIB, ge=1024, description="largest JSON body")
    record_body_bytes: int = Field(
        default=64 * MIB, ge=1024, description="largest JSON body of raw records"
    )
    json_readings: int = Field(default=20_000, ge=1, description="most readings in a JSON body")
    batch_body_bytes: int = Field(
        default=4096 * MIB, ge=1024, description="largest table, after decompression"
    )
    wire_body_bytes: int = Field(
        default=1024 * MIB, ge=1024, description="largest compressed table, as sent"
    )
    batch_rows: int = Field(default=100_000_000, ge=1, description="most rows of a table")
    answer_bytes: int = Field(
        default=16384 * MIB, ge=1024, description="longest answer to a table, kept until it ends"
    )
    drawn_values: int = Field(
        default=300_000_000,
        ge=1_000_000,
        description="most draws times readings times models of one request",
    )
    header_bytes: int = Field(default=64 * 1024, ge=1024, description="largest headers in all")
    line_bytes: int = Field(
        default=MIB, ge=1024, description="longest line of a CSV or NDJSON body"
    )
    block_bytes: int = Field(
        default=MIB, ge=1024, description="part of a body that is computed at once"
    )
    body_stall_seconds: float = Field(
        default=30.0, gt=0, description="longest pause while a body arrives; then 408"
    )
    request_seconds: float = Field(
        default=3600.0,
        gt=0,
        description="longest time for a body to arrive and be worked out; then 408",
    )
    drain_seconds: float = Field(
        default=0.0, ge=0, le=600, description="time between a stop signal and the end of listening"
    )
    requests_per_minute: int = Field(
        default=0, ge=0, description="most requests of one key in each server process; 0: any"
    )
    future_seconds: float = Field(
        default=300.0, ge=0, description="how far the clock of a logger may be ahead"
    )
    page_rows: int = Field(
        default=150_000, ge=1, description="most rows of an answer from the store"
    )
    connections: int = Field(
        default=4096, ge=2, description="connections of each process, idle ones included; then 503"
    )
    queued_batches: int = Field(
        default=16, ge=1, description="batches that are taken on at a time; further ones get 503"
    )

    @property
    def on_loopback(self) -> bool:
        """Whether only programs of the same machine can reach the service."""
        if self.host.lower() == "localhost":
            return True
        try:
            return ip_address(self.host).is_loopback
        except ValueError:
            return False

    def as_environment(self) -> dict[str, str]:
        """The variables from which another process reads the same settings."""
        return {variable(name): str(value) for name, value in self}


LIMITS = (
    "json_body_bytes", "record_body_bytes", "json_readings", "drawn_values", "batch_body_bytes",
    "wire_body_bytes",
    "batch_rows", "answer_bytes", "header_bytes", "line_bytes", "body_stall_seconds",
    "request_seconds", "queued_batches", "connections", "requests_per_minute", "future_seconds",
    "page_rows",
)  # fmt: skip
"""Settings that a client meets."""


def variable(name: str) -> str:
    """The environment variable of an option."""
    return PREFIX + name.upper()


def read_settings(**given: object) -> Settings:
    """Settings from what is given, else from the environment, else by default.

    Raises SettingsError, which names each option and its variable.
    """
    try:
        return Settings(**given)  # type: ignore[arg-type]
    except ValidationError as error:
        wrong = [
            f"--{fault.pointer[2:].replace('_', '-')} ({variable(fault.pointer[2:])}): "
            f"{fault.detail}"
            for fault in problems_of(error)
        ]
        raise SettingsError("\n".join(wrong)) from None


def misspelt(environment: Mapping[str, str]) -> Iterator[str]:
    """A sentence for every variable with our prefix that is no option."""
    known = [variable(name) for name in Settings.model_fields]
    for name in environment:
        if name.upper().startswith(PREFIX) and name.upper() not in known:
            close = difflib.get_close_matches(name.upper(), known, n=1)
            hint = f"; did you mean {close[0]}?" if close else f"; known are {', '.join(known)}"
            yield f"the environment variable {name} is no option and has no effect{hint}"
