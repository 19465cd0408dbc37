"""The invented readings as loggers write them: CSV with its dirt, NDJSON, JSON."""

import csv
import io
import json
from collections.abc import Iterator
from datetime import UTC, datetime, timedelta
from typing import Any

from models.scenario import Scenario, embankment_day, farm_week

STATION = "brackenfold-2"
START = datetime(2026, 4, 6, tzinfo=UTC)
HEADER = ("time", "station", "depth", "apparent_permittivity", "temperature",
          "bulk_conductivity", "battery_voltage", "note")  # fmt: skip
GAP = (timedelta(days=4, hours=9), timedelta(days=4, hours=11, minutes=30))
DIRT = {
    97: ("apparent_permittivity", ""),
    98: ("temperature", "NAN"),
    99: ("apparent_permittivity", "-9999"),
    100: ("temperature", "---"),
    101: ("bulk_conductivity", "N/A"),
    640: ("apparent_permittivity", "ERR 17"),
    641: ("temperature", "ERR 17"),
    642: ("bulk_conductivity", ""),
    1200: ("note", 'battery changed, "B" cells'),
    1203: ("note", "probe cable re-seated; lid, gasket"),
}
"""Cells that went wrong, by row before the gap was taken out."""
REPEATED = 1500
"""A row the logger sent twice."""

Row = dict[str, Any]


def farm_rows(scenario: Scenario | None = None) -> Iterator[Row]:
    """A week of the farm station, row by row, as its logger would write it."""
    readings = scenario or farm_week()
    for place in range(readings.seconds.size):
        since = timedelta(seconds=float(readings.seconds[place]))
        if GAP[0] <= since < GAP[1]:
            continue
        row: Row = {
            "time": (START + since).strftime("%Y-%m-%dT%H:%M:%SZ"),
            "station": STATION,
            "depth": f"{readings.depth[place]:.2f}",
            "apparent_permittivity": f"{readings.apparent_permittivity[place]:.2f}",
            "temperature": f"{readings.temperature[place]:.2f}",
            "bulk_conductivity": f"{10 * readings.bulk_conductivity[place]:.3f}",
            "battery_voltage": f"{12.6 - 0.02 * place / 672:.2f}",
            "note": "",
        }
        if place in DIRT:
            name, cell = DIRT[place]
            row[name] = cell
        yield row
        if place == REPEATED:
            yield row


def farm_csv() -> str:
    """The farm week as text/csv."""
    text = io.StringIO()
    table = csv.DictWriter(text, HEADER, lineterminator="\n")
    table.writeheader()
    table.writerows(farm_rows())
    return text.getvalue()


def farm_ndjson() -> str:
    """The farm week as NDJSON: numbers as numbers, nothing as null, dirt as it came."""
    return "".join(json.dumps(_typed(row)) + "\n" for row in farm_rows())


def embankment_document(hours: int = 6) -> dict[str, Any]:
    """Hours of the embankment as a JSON request, readings as columns."""
    readings = embankment_day(hours=hours)
    times = [
        (START + timedelta(seconds=float(seconds))).strftime("%Y-%m-%dT%H:%M:%SZ")
        for seconds in readings.seconds
    ]
    return {
        "mixing_model": "roth-1990",
        "soil": {"texture": "clay-loam", "bulk_density": 1.54, "bulk_density_u": 0.03},
        "probe": {"frequency": 0.8e9, "apparent_permittivity_u": 0.2, "temperature_u": 0.3},
        "readings": {
            "time": times,
            "depth": readings.depth.tolist(),
            "apparent_permittivity": [round(k, 2) for k in readings.apparent_permittivity.tolist()],
            "temperature": [round(t, 2) for t in readings.temperature.tolist()],
        },
    }


def _typed(row: Row) -> Row:
    """Cells as JSON: text that is a number becomes one."""
    typed: Row = {}
    for name, cell in row.items():
        if name in {"time", "station", "note"}:
            typed[name] = cell
        elif cell == "":
            typed[name] = None
        else:
            typed[name] = _number(cell)
    return typed


def _number(cell: str) -> float | str:
    try:
        number = float(cell)
    except ValueError:
        return cell
    return number if number == number else cell  # noqa: PLR0124 - NaN stays the text it was
