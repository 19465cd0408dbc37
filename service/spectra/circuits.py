"""Circuits in a request and an answer: the material of a circuit, and its two units in series."""

from typing import Annotated, Any, Literal

import numpy as np
from pydantic import Field

from models.conductivity.loss import VACUUM_PERMITTIVITY
from models.conversion import Units, from_si
from models.relation import Array
from models.spectrum.circuits.circuit import (
    PHASE,
    RC,
    RLC,
    UNITS,
    Branch,
    Circuit,
    Constants,
    constants_of,
)
from models.spectrum.circuits.paths import Geometry, materials
from models.spectrum.circuits.units import (
    Relaxing,
    TwoUnits,
    Unit,
    branches_of,
    three_branches,
    two_units,
)
from service.errors import Unprocessable
from service.faults import Fault
from service.schemas.words import Body, Number

Positive = Annotated[Number, Field(gt=0)]
NEEDS = {RC: ("resistance",), RLC: ("resistance", "inductance"),
         PHASE: ("phase_element", "exponent")}  # fmt: skip


class BranchBody(Body):
    """Elements in series, between the ends of the cell."""

    kind: Literal["series-rc", "series-rlc", "series-c-phase-element"]
    capacitance: Positive
    resistance: Positive | None = None
    inductance: Positive | None = None
    phase_element: Positive | None = Field(None, description="Q of Z = 1 / (Q (j w)^exponent)")
    exponent: Annotated[Number, Field(ge=0, lt=1)] | None = None


class UnitBody(Body):
    """A capacitor [F] with a resistor [Ohm] in parallel."""

    capacitance: Positive
    resistance: Positive


class CircuitBody(Body):
    """A filled cell as lumped elements: branches in parallel, or two units in series."""

    cell_capacitance: Positive = Field(VACUUM_PERMITTIVITY, description="of the empty cell [F]")
    parallel: UnitBody | None = Field(
        None, description="capacitor and resistor beside the branches"
    )
    branches: list[BranchBody] = Field(default_factory=list, max_length=40)
    two_units: Annotated[list[UnitBody], Field(min_length=2, max_length=2)] | None = Field(
        None, description="two units in series, in place of parallel and branches"
    )


class GeometryBody(Body):
    """Paths of two materials: each alone, and both in turn."""

    first: Annotated[Number, Field(ge=0, le=1)] = Field(description="share of the first alone")
    second: Annotated[Number, Field(ge=0, le=1)] = Field(description="share of the second alone")
    split: Annotated[Number, Field(gt=0, lt=1)] = Field(
        description="of the length of the path of both, the part that is of the first"
    )


def circuit_from(body: CircuitBody) -> Circuit:
    """The circuit of a request. Raises Unprocessable where elements are missing."""
    cell = body.cell_capacitance
    if body.two_units is not None:
        if body.parallel is not None or body.branches:
            raise _refusal("two_units stand in place of parallel and branches", "#/circuit")
        first, second = (Unit(one.capacitance, one.resistance) for one in body.two_units)
        three = three_branches(TwoUnits(first, second))
        series = {"capacitance": three.series_capacitance, "resistance": three.series_resistance}
        return Circuit(cell, three.capacitance, three.resistance, (Branch(RC, series),))
    if body.parallel is None:
        raise _refusal("parallel is missing: the capacitor and resistor beside the branches",
                       "#/circuit/parallel")  # fmt: skip
    branches = tuple(_branch(one, place) for place, one in enumerate(body.branches))
    return Circuit(cell, body.parallel.capacitance, body.parallel.resistance, branches)


def _branch(body: BranchBody, place: int) -> Branch:
    needed = ("capacitance", *NEEDS[body.kind])
    given = body.model_dump(exclude_none=True, exclude={"kind"})
    if set(given) != set(needed):
        detail = f"{body.kind} has {', '.join(needed)}; found {', '.join(given)}"
        raise _refusal(detail, f"#/circuit/branches/{place}")
    return Branch(body.kind, given, place)


def _refusal(detail: str, place: str) -> Unprocessable:
    return Unprocessable(detail, [Fault(detail, place)])


def material_echo(circuit: Circuit, frequency: Array, units: Units) -> dict[str, Any]:
    """The answer to a circuit: its material, its two units, and its impedance where asked."""
    found = constants_of(circuit)
    told: dict[str, Any] = {
        "material": {
            "infinite_permittivity": found.infinite_permittivity,
            "bulk_conductivity": float(from_si("bulk_conductivity", found.conductivity, units)),
            "terms": [{"kind": kind, **_in_units(values, units)} for kind, values in found.terms],
        },
        "two_units": two_units_echo(found, circuit.cell),
    }
    if frequency.size:
        z = circuit.impedance(frequency)
        eps = 1 / (2j * np.pi * frequency * circuit.cell * z)
        told["spectrum"] = {
            "frequency": from_si("frequency", frequency, units),
            "real_permittivity": np.ascontiguousarray(eps.real),
            "imaginary_permittivity": -eps.imag,
        }
        told["impedance"] = {"real": np.ascontiguousarray(z.real),
                             "imaginary": np.ascontiguousarray(z.imag)}  # fmt: skip
    return {**told, "circuit_units": dict(UNITS)}


def _in_units(values: Any, units: Units) -> dict[str, float]:
    quantities = {"relaxation_strength", "relaxation_time"}
    return {name: float(from_si(name, value, units)) if name in quantities else float(value)
            for name, value in values.items()}  # fmt: skip


def relaxing_of(found: Constants) -> Relaxing | None:
    """The one Debye relaxation with conduction; None where there is anything else."""
    if len(found.terms) != 1 or found.terms[0][0] != "debye" or not found.conductivity > 0:
        return None
    values = found.terms[0][1]
    return Relaxing(found.infinite_permittivity, values["relaxation_strength"],
                    values["relaxation_time"], found.conductivity)  # fmt: skip


def two_units_echo(found: Constants, cell: float) -> list[dict[str, float]] | None:
    """The two units in series that have the same impedance, the slower first."""
    material = relaxing_of(found)
    if material is None:
        return None
    pair = two_units(branches_of(material, cell))
    return [{"capacitance": unit.capacitance, "resistance": unit.resistance}
            for unit in (pair.slow, pair.fast)]  # fmt: skip


def materials_echo(
    found: Constants, geometry: GeometryBody, units: Units
) -> list[list[dict[str, float]]] | None:
    """Every pair of materials that makes this relaxation in paths of that geometry."""
    material = relaxing_of(found)
    if material is None:
        return None
    shares = Geometry(geometry.first, geometry.second, geometry.split)
    return [
        [{"permittivity": one.permittivity,
          "bulk_conductivity": float(from_si("bulk_conductivity", one.conductivity, units))}
         for one in pair]
        for pair in materials(material, shares)
    ]  # fmt: skip
