"""The farm's week as a station: its soil, a probe at each depth, its readings, asked back."""

import json
import urllib.request
from typing import Any

from service.demo.tables import STATION, farm_csv

SOIL = {"texture": "silt-loam", "bulk_density": 1.35, "bulk_density_u": 0.04,
        "mixing_model": "crim"}  # fmt: skip
PROBE = {"frequency": 0.8e9, "apparent_permittivity_u": 0.15, "temperature_u": 0.2}
DEPTHS = (0.15, 0.35, 0.60)
SPAN = "start=2026-04-06T00:00:00Z&end=2026-04-13T00:00:00Z"


def kept_week(address: str) -> str:
    """Keep the week, ask for a day's means, and say where its chart is."""
    _send(f"{address}/v1/soils/farm-silt-loam", SOIL)
    installations = []
    for depth in DEPTHS:
        name = f"probe-{depth * 100:.0f}"
        _send(f"{address}/v1/probes/{name}", PROBE)
        installations.append({"probe": name, "soil": "farm-silt-loam", "depth": depth,
                              "from": "2026-04-01T00:00:00Z"})  # fmt: skip
    station = {"title": "Invented farm", "zone": "UTC", "interval": 900, "sentinels": [-9999],
               "installations": installations}  # fmt: skip
    here = f"{address}/v1/stations/{STATION}"
    _send(here, station)
    kept = _ask(f"{here}/readings", farm_csv().encode(), "text/csv")
    days = _ask(f"{here}/estimates?{SPAN}&every=1d")
    return (
        f"As a station: {kept['accepted']} readings kept, {kept['duplicates']} sent twice, "
        f"{len(kept['rejected'])} rejected with their reason; {len(days['estimates'])} daily "
        "means.\n"
        f"Chart: {here}/chart.svg?{SPAN}"
    )


def _send(url: str, body: dict[str, Any]) -> None:
    _ask(url, json.dumps(body).encode(), "application/json", method="PUT")


def _ask(
    url: str, body: bytes | None = None, media_type: str = "", method: str | None = None
) -> Any:
    headers = {"Content-Type": media_type} if media_type else {}
    request = urllib.request.Request(url, body, headers, method=method)  # noqa: S310 - loopback
    with urllib.request.urlopen(request, timeout=30) as answer:  # noqa: S310
        return json.loads(answer.read())
