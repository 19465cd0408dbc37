"""Whose the band is: each share is what goes when its source is taken away."""

import numpy as np
import pytest

from models.estimate import Query, estimate, prepare
from models.estimate.beside.budget import budget
from models.readings import read
from models.soil.description import describe

COLUMNS = {"apparent_permittivity": 13.35, "temperature": 18.0, "bulk_conductivity": 1.338}


def asked(error, frequency=120e6, **probe):
    return prepare(
        Query(
            model="topp-1980", soil=describe("silty-clay-loam", {}, {}), standard_error=error,
            columns=frozenset(COLUMNS), probe={"frequency": frequency, **probe},
        )
    )  # fmt: skip


def readings():
    return read({name: np.array([value]) for name, value in COLUMNS.items()}, {}, {})


@pytest.mark.parametrize("frequency", [120e6, 1e9])
def test_a_correction_for_conduction_is_no_error_of_the_model(frequency):
    """An exact model takes its own share along, and leaves that of the correction."""
    found = budget(readings(), asked(0.015, frequency))["water_content"]
    with_model, without = (
        estimate(readings(), asked(error, frequency)).columns["water_content_u"][0]
        for error in (0.015, 0.0)
    )
    gone = 1.0 - without**2 / with_model**2
    assert found.shares["mixing_model"][0] == pytest.approx(gone, abs=0.01)
    assert found.shares["conduction_correction"][0] > 0.5 * (frequency < 1e9)
    assert sum(share[0] for share in found.shares.values()) == pytest.approx(1.0)


def test_the_sentence_names_what_would_help():
    (sentence,) = budget(readings(), asked(0.015))["water_content"].sentences
    assert sentence.startswith("conduction_correction makes")
    assert "a probe of higher frequency" in sentence
