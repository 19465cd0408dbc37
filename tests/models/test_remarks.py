"""What is said of values as a whole: units that are suspected, times that rods cannot have."""

import numpy as np
import pytest

from models.conversion import to_si
from models.errors import ParameterError
from models.flags import BIT
from models.quantity import QUANTITIES
from models.readings import read
from models.remarks import Remarks, travel_times

LIGHT = 0.299792458  # m/ns, exact by the definition of the metre


def said(columns, units=None, unreadable=None, **described):
    """The advisories of some columns, by code."""
    columns = {name: np.array(values, float) for name, values in columns.items()}
    found = read(columns, units or {}, unreadable or {})
    remarks = Remarks(**described)
    remarks.note(columns, units or {}, found.flags, {}, unreadable or {})
    return {one.code: one.text for one in remarks.advice(units or {})}


def impossible_times(length, *times):
    """As the estimates flag them, which know the rods."""
    remarks, values = Remarks(length), np.array(times, float)
    flags = np.full(len(times), BIT["out-of-gate:travel_time"])
    remarks.note({"travel_time": values}, {}, flags)
    return {one.code: one.text for one in remarks.advice({})}


@pytest.mark.parametrize("length", [0.05, 0.15, 0.3])
def test_travel_times_are_those_of_light_there_and_back(length):
    gate = travel_times(length)
    assert gate.low * 1e9 == pytest.approx(2 * length / LIGHT, rel=1e-12)
    assert gate.high == pytest.approx(gate.low * 200**0.5, rel=1e-12)  # Ka up to 200


def test_a_time_in_seconds_is_told_to_be_one():
    told = impossible_times(0.15, 4e-9)
    assert "impossible in ns and possible in s, such as 4e-09" in told["unit-suspected"]


@pytest.mark.parametrize("time", [0.9, 40.0])
def test_no_unit_is_suspected_that_makes_it_worse(time):
    """0.9 ns is too short for 0.15 m of rods, and 0.9 ps all the more."""
    told = impossible_times(0.15, time)
    assert "unit-suspected" not in told
    assert "along rods of 0.15 m, there and back, 1 to 14.2 ns" in told["travel-time-impossible"]


def test_picoseconds_are_still_told():
    assert "possible in ps" in impossible_times(0.15, 4000.0)["unit-suspected"]


@pytest.mark.parametrize("name", [n for n, q in QUANTITIES.items() if q.lookalikes and q.gate])
def test_a_possible_value_suspects_no_unit(name):
    quantity = QUANTITIES[name]
    middle = (quantity.gate_si.low + quantity.gate_si.high) / 2
    assert quantity.likely_unit(middle, quantity.unit) is None


def test_a_value_with_an_impossible_uncertainty_suspects_no_unit_of_the_value():
    told = said({"bulk_conductivity": [0.5], "bulk_conductivity_u": [-1.0]})
    assert "unit-suspected" not in told
    assert (
        "1 values of bulk_conductivity_u cannot be used, such as -1"
        in (told["uncertainty-not-used"])
    )


def test_each_uncertainty_that_cannot_be_used_is_named():
    unreadable = {"temperature_u": np.array([False, True])}
    columns = {"apparent_permittivity": [17, 18], "apparent_permittivity_u": [0.3, 300],
               "temperature": [14, 15], "temperature_u": [1, np.nan]}  # fmt: skip
    found = read({n: np.array(v, float) for n, v in columns.items()}, {}, unreadable)
    assert found.flags.tolist() == [0, int(BIT["unusable-uncertainty"])]
    assert np.isnan(found.columns["temperature"]).tolist() == [False, True]
    remarks = Remarks()
    remarks.note({n: np.array(v, float) for n, v in columns.items()}, {}, found.flags, {},
                 unreadable)  # fmt: skip
    texts = [one.text for one in remarks.advice({})]
    assert len(texts) == 2
    assert "1 values of apparent_permittivity_u cannot be used, such as 300" in texts[0]
    assert "1 values of temperature_u cannot be used, such as text" in texts[1]
    assert "There temperature was not used either." in texts[1]


def test_conductivities_that_few_soils_reach_are_asked_about():
    told = said({"bulk_conductivity": [0.4, 8.5, 6.0, np.nan]})["bulk-unit-doubted"]
    assert "2 values of bulk_conductivity are above 5 dS/m, up to 8.5" in told
    assert "were they in mS/m?" in told


@pytest.mark.parametrize(
    ("values", "units", "described"),
    [
        ([4.9, np.nan], {}, {}),
        ([8.5], {"bulk_conductivity": "dS/m"}, {}),
        ([850.0], {"bulk_conductivity": "mS/m"}, {}),
        ([8.5], {}, {"as_sent": False}),
        ([25.0], {}, {}),  # impossible, which is said in other words
    ],
)
def test_a_unit_that_was_named_is_not_doubted(values, units, described):
    assert "bulk-unit-doubted" not in said({"bulk_conductivity": values}, units, **described)


@pytest.mark.parametrize(
    ("given", "told"),
    [
        ({"porosity": 0.4, "porosity_u": 2.0}, "that looks like %; send 0.02"),
        ({"clay": 0.2, "clay_u": 5.0}, '"units": {"clay": "%"}'),
        ({"bulk_density": 14.2}, "a unit weight in kN/m3; send it over 9.80665, 1.448"),
    ],
)
def test_a_soil_in_another_unit_is_told_which(given, told):
    with pytest.raises(ParameterError, match="found") as caught:
        to_si("soil", given, {})
    assert told in str(caught.value)


def test_a_density_that_fits_nothing_is_told_nothing():
    with pytest.raises(ParameterError) as caught:
        to_si("soil", {"bulk_density": -1.0}, {})
    assert str(caught.value).endswith("found -1")
