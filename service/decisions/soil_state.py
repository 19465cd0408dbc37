"""POST /v1/soil-state: water content and densities in; the state of the soil out."""

from collections.abc import Sequence
from typing import Any

import numpy as np
from pydantic import Field, TypeAdapter

from models.advisories import Advice, advise
from models.conversion import Units
from models.decisions.advisories import say
from models.decisions.outcome import Outcome
from models.decisions.soil_state import SoilState, soil_state
from models.soil.description import PARTICLE_DENSITY, PARTICLE_DENSITY_U
from service.decisions.description import answer_schema, described, row_schema
from service.decisions.fields import DecisionSettings, item_of, items, needed, optional
from service.decisions.rows import Row, in_shape, known, labels, rows_of, used, without_uncertainty
from service.decisions.told import advice_told, banded, exact_values, units_told

NOUN = "soils"
MINERAL = "mineral soil, 2.65 g/cm3"
TOLD = ("gravimetric_water_content", "porosity", "void_ratio", "degree_of_saturation",
        "air_content", "total_density", "zero_air_density", "compaction")  # fmt: skip
GIVEN = ("water_content", "bulk_density", "particle_density", "largest_bulk_density")

SoilStateBody = item_of(
    "SoilState",
    "A soil by its volumetric water content and dry (bulk) density.",
    {
        **needed("water_content"),
        **needed("bulk_density"),
        **optional(("particle_density", "largest_bulk_density")),
    },
)


class SoilStatesBody(DecisionSettings):
    """Soils, one or a list of them."""

    soils: items(SoilStateBody) = Field(description="one soil or a list of them")  # type: ignore[valid-type]


SOIL_STATES: TypeAdapter[SoilStatesBody] = TypeAdapter(SoilStatesBody)
DESCRIPTION = described(
    SOIL_STATES,
    "Soils by volumetric water content and dry (bulk) density. particle_density is that of mineral "
    "soil, 2.65 g/cm3 to 0.05, where it is not given, and an advisory says so; with "
    "largest_bulk_density the degree of compaction is told as well. Water is counted with 1 g/cm3.",
    answer_schema(NOUN, row_schema(TOLD, {}), {}),
    "Masses and volumes of solids, water and air, each with its band; nothing is cut where the "
    "numbers contradict, and a flag says so.",
)


def answer_of(body: SoilStatesBody) -> dict[str, Any]:
    """The answer to a checked request, its soils in the shape they came.

    Raises ParameterError or Unprocessable with the place of what cannot be used.
    """
    single = not isinstance(body.soils, list)
    bodies: Sequence[Any] = [body.soils] if single else body.soils
    rows = rows_of(bodies, NOUN, body.units, single=single)
    assumed = [row for row in rows if not row.has("particle_density")]
    for row in assumed:
        row.add("particle_density", PARTICLE_DENSITY, PARTICLE_DENSITY_U, MINERAL)
    state = soil_state(
        *(known(rows, name) for name in GIVEN[:3]),
        largest_dry_density=known(rows, "largest_bulk_density"),
        probability=body.coverage_probability,
    )
    told = [
        {**labels(one), **_row(state, row, k, body.units)}
        for k, (one, row) in enumerate(zip(bodies, rows, strict=True))
    ]
    return {
        NOUN: in_shape(told, single=single),
        "units": units_told(told, body.units),
        "coverage_probability": body.coverage_probability,
        "advisories": advice_told(_advice(rows, len(assumed))),
    }


def _row(state: SoilState, row: Row, k: int, units: Units) -> dict[str, Any]:
    outcomes: dict[str, Outcome] = {name: getattr(state, name) for name in TOLD}
    if not row.has("largest_bulk_density"):
        del outcomes["compaction"]
    return {**banded(outcomes, k, units), "used": used(row, units), "flags": _flags(state, k)}


def _flags(state: SoilState, k: int) -> list[str]:
    air = state.air_content
    flags = ["water-exceeds-pores"] if state.contradicts[k] else []
    if air.lower[k] <= 0.0 <= air.upper[k] and air.standard_uncertainty[k] > 0.0:
        flags.append("saturation-not-told-apart")
    if np.isnan(state.degree_of_saturation.value[k]):
        flags.append("denser-than-solids")
    return flags


def _advice(rows: Sequence[Row], assumed: int) -> list[Advice]:
    said = [advise("indirect-measurement"), say("earthworks"), say("compaction-acceptance"),
            advise("numbers-not-verdicts")]  # fmt: skip
    if assumed:
        said.append(say("particle-density-assumed", count=assumed))
    return said + exact_values(without_uncertainty(rows, GIVEN))
