"""Waveforms as the raw records of readings: what an estimate takes from them."""

from collections.abc import Mapping
from dataclasses import replace
from typing import Any

import numpy as np

from models.conversion import Units
from models.errors import ParameterError
from models.flags import Flags
from models.relation import Array
from service.errors import Unprocessable
from service.faults import Fault, pointer
from service.waveforms.answer import advice_of, probe_echo
from service.waveforms.bodies import SETTINGS, WAVEFORM
from service.waveforms.measuring import measured, refuse_many
from service.waveforms.question import bench_of, checked, groups_of, in_hertz
from service.waveforms.traces import Place, refuse_coarse

TAKEN = ("apparent_permittivity", "apparent_permittivity_u", "bulk_conductivity",
         "bulk_conductivity_u", "frequency", "frequency_u")  # fmt: skip


def columns_of_waveforms(
    records: Mapping[int, Any], count: int, where: Mapping[int, Place], settings: Any, units: Units
) -> tuple[Mapping[str, Array], Flags, Mapping[str, Any], Mapping[str, Array]]:
    """Columns in SI, flags, the probe as it was used, and what readings of it share.

    records: parsed JSON by row. where: the steps to each in the request. settings: parsed JSON.
    Raises ModelError or Unprocessable with the place of what cannot be used.
    """
    place: Place = ("raw_records", "waveform")
    if settings is None:
        detail = "a waveform needs its probe: give raw_records.waveform.probe in the request"
        raise Unprocessable(detail, [Fault(detail, pointer(place))])
    known = {name: code for name, code in units.items() if name == "frequency"}
    asked = in_hertz(checked(SETTINGS, settings, place), known)
    refuse_many(len(records), asked, "#/readings")
    bodies = {row: checked(WAVEFORM, record, where[row]) for row, record in records.items()}
    groups = groups_of(bodies, where)
    bench = bench_of(asked, units, place)
    refuse_coarse(bodies, where, bench.length)
    try:
        found = measured(groups, count, asked, bench)
    except ParameterError as error:
        placed = [replace(c, place=(*map(str, place), *c.place)) for c in error.complaints]
        raise ParameterError("waveform", placed) from None
    columns = {name: found.columns[name] for name in TAKEN if name in found.columns}
    if np.isnan(columns["bulk_conductivity"]).all():
        columns = {name: values for name, values in columns.items() if "bulk" not in name}
    echo = {
        "method": asked.method,
        "probe": probe_echo(found, units),
        "advisories": [{"code": said.code, "text": said.text} for said in advice_of(bench, found)],
    }
    name = "apparent_permittivity"
    return columns, found.flags, echo, {name: found.columns[f"{name}_u_shared"]}
