"""The command `gleyline demo`: a service of its own, readings of every kind, a table of answers."""

import tempfile
import threading
import time
from collections.abc import Iterator
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path
from typing import Any

import click
import uvicorn

from service.app import create_app
from service.demo.post import Posted, post_json, post_table
from service.demo.station import kept_week
from service.demo.tables import STATION, embankment_document, farm_csv, farm_ndjson
from service.examples import examples
from service.settings import Settings

FARM = "mixing_model=crim&texture=silt-loam&bulk_density=1.35&bulk_density_u=0.04" \
    "&frequency=0.8e9&apparent_permittivity_u=0.15&temperature_u=0.2"  # fmt: skip
START_SECONDS = 20.0
RAW = {
    ("post_estimates", "waveform"): "a TDR trace in a loam",
    ("post_estimates", "spectrum"): "a permittivity spectrum",
}
"""Examples that are shown as well: raw records, simulated."""


@dataclass(frozen=True, slots=True)
class Line:
    """One line of the table."""

    place: str
    row: dict[str, Any]


@click.command()
@click.option("--port", type=int, default=0, help="port to listen on; any free one by default")
@click.option("--once", is_flag=True, help="end after the table")
def demo(port: int, once: bool) -> None:  # noqa: FBT001 - click passes it by name
    """Show the service at work on an invented farm and an invented embankment."""
    with tempfile.TemporaryDirectory() as folder, _served(port, Path(folder)) as address:
        click.echo("Every reading here is invented; no such farm or embankment exists.\n")
        click.echo(_report(address))
        click.echo(f"\nPage: {address}/   every operation: {address}/docs")
        if once:
            return
        click.echo("Ctrl-C ends it.")
        try:
            threading.Event().wait()
        except KeyboardInterrupt:
            click.echo()


def _report(address: str) -> str:
    """Post readings of every kind and lay the answers out."""
    table = post_table(address, FARM, "text/csv", farm_csv())
    again = post_table(address, FARM, "application/x-ndjson", farm_ndjson())
    wall = post_json(address, embankment_document())
    chosen = post_json(address, _unnamed())
    lines = [*_latest(table, f"farm {STATION}"), *_latest(wall, "embankment, downstream shoulder")]
    lines += _latest(chosen, f"one reading, model chosen: {chosen.model}")
    for operation, name, example in examples():
        if (operation, name) in RAW:
            place = RAW[operation, name]
            lines += _latest(post_json(address, example["request"]["json"]), place)
    told = [_HEAD, *(_line(line) for line in lines), ""]
    told.append(
        f"The farm's week: {len(table.rows)} rows in as CSV, {len(table.rows)} out, "
        f"{table.flagged} flagged; the same as NDJSON: {len(again.rows)} rows, "
        + ("the same numbers." if _same(table, again) else "other numbers!")
    )
    told.append(kept_week(address))
    told += ["", *(f"- {text}" for text in wall.advisories)]
    return "\n".join(told)


_HEAD = (
    f"{'readings of':44} {'time':20} {'depth':>6} {'water content':>14} {'95 % band':>17}  flags"
)


def _line(line: Line) -> str:
    row = line.row
    depth = "" if row.get("depth") is None else f"{float(row['depth']):.2f} m"
    if row["water_content"] is None:
        value, band = "-", ""
    else:
        value = f"{row['water_content']:.3f} m3/m3"
        band = f"{row['water_content_lower']:.3f} to {row['water_content_upper']:.3f}"
    flags = ", ".join(row["flags"])
    return f"{line.place:44} {row.get('time') or '':20} {depth:>6} {value:>14} {band:>17}  {flags}"


def _latest(posted: Posted, place: str) -> Iterator[Line]:
    """The last reading of each depth, and the first flagged one."""
    latest = {row.get("depth"): row for row in posted.rows}
    for row in latest.values():
        yield Line(place, row)
    flagged = next((row for row in posted.rows if row["flags"]), None)
    if flagged is not None and flagged not in latest.values():
        yield Line(f"{place}, flagged", flagged)


def _same(one: Posted, other: Posted) -> bool:
    names = ("water_content", "water_content_lower", "water_content_upper")
    return [[row[n] for n in names] for row in one.rows] == [
        [row[n] for n in names] for row in other.rows
    ]


def _unnamed() -> dict[str, Any]:
    """One reading with its soil, and no model named."""
    return {
        "soil": {"texture": "sandy-loam", "porosity": 0.43, "porosity_u": 0.02},
        "probe": {"frequency": 1.0e9, "apparent_permittivity_u": 0.3, "temperature_u": 0.5},
        "readings": [
            {"time": "2026-05-04T06:00:00Z", "apparent_permittivity": 12.4, "temperature": 14.1}
        ],
    }


@contextmanager
def _served(port: int, folder: Path) -> Iterator[str]:
    """A service on loopback, in a thread of this process, with a store that goes with it."""
    settings = Settings(host="127.0.0.1", port=port, data=folder)
    config = uvicorn.Config(
        create_app(settings), host="127.0.0.1", port=port, log_level="warning", access_log=False
    )
    server = uvicorn.Server(config)
    thread = threading.Thread(target=server.run, daemon=True)
    thread.start()
    deadline = time.monotonic() + START_SECONDS
    while not server.started:
        if not thread.is_alive() or time.monotonic() > deadline:
            raise click.ClickException(f"the service did not start on port {port}")
        time.sleep(0.02)
    try:
        yield f"http://127.0.0.1:{server.servers[0].sockets[0].getsockname()[1]}"
    finally:
        server.should_exit = True
        thread.join()
