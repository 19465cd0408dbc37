"""What an answer says beside its estimates, where it was asked to."""

from collections.abc import Iterable, Mapping
from typing import Any

from models.advisories import Advice
from models.estimate.beside.budget import Shares
from models.estimate.beside.ensemble import EveryModel
from models.estimate.beside.explanation import Explanation
from models.estimate.beside.validation import Validated
from models.relation import Array
from service.schemas.echo import advice_echo, model_echo, surroundings_echo
from service.schemas.estimates import ALL, EstimatesSettings


def explanation_echo(found: Explanation) -> dict[str, Any]:
    """Effects of temperature, one list entry per reading, null where one cannot be told."""
    return {
        "explanation": {
            "reference_temperature": {"value": 20.0, "unit": "Cel"},
            "unit": "m3/m3",
            "effects": _lists(found.effects),
            "dominant": list(found.dominant),
        }
    }


def budget_echo(found: Mapping[str, Shares]) -> dict[str, Any]:
    """Shares of the variance by source, and the sentence of each reading; salt by its name."""
    told = {
        name: {"share": _lists(of.shares), "largest": list(of.sentences)}
        for name, of in found.items()
    }
    return {"budget": told.pop("water_content") | told}


def validation_echo(found: Validated) -> dict[str, Any]:
    """Whether first order holds for each reading; differences of the ends, m3/m3."""
    return {
        "validation": {
            "draws": found.draws,
            "unit": "m3/m3",
            "first_order_holds": found.holds.tolist(),
            "lower_difference": _list(found.lower_difference),
            "upper_difference": _list(found.upper_difference),
            "tolerance": _list(found.tolerance),
        }
    }


def ensemble_echo(
    found: EveryModel, settings: EstimatesSettings, remarks: Iterable[Advice]
) -> dict[str, Any]:
    """Every constant of every model that answered, and why the others did not."""
    return {
        "mixing_model": ALL,
        "mixing_models": [model_echo(basis, settings.units) for basis in found.bases.values()],
        "not_answering": [{"name": key, "reason": why} for key, why in found.silent.items()],
        **surroundings_echo(found.query, settings),
        "advisories": advice_echo((*found.advice, *remarks)),
    }


def _lists(columns: Mapping[str, Array]) -> dict[str, list[float | None]]:
    return {name: _list(values) for name, values in columns.items()}


def _list(values: Array) -> list[float | None]:
    return [value if value == value else None for value in values.tolist()]  # noqa: PLR0124
