"""POST /v1/in-place-density against round trips done apart and linear propagation."""

import pytest
from uncertainties import ufloat
from uncertainties.umath import sqrt

from tests.service.decisions.asking import ask, changed, codes

MOULD, FIELD, SALTY = 14.68805625, 13.53651264, 0.20271606
TWO_STEP = {
    "coefficients": {"a": 1.0, "b": 8.5},
    "mould": {"apparent_permittivity": MOULD, "total_density": 1.995},
    "places": {"apparent_permittivity": FIELD},
}
ONE_STEP = {
    "method": "one-step",
    "coefficients": {"a": 1.0, "b": 8.5, "c": 0.1, "d": 1.2},
    "places": {"apparent_permittivity": FIELD, "standard_conductivity": SALTY},
}


@pytest.mark.parametrize("body", [TWO_STEP, ONE_STEP], ids=["two-step", "one-step"])
def test_there_and_back(server, body):
    """w 0.14 and dry density 1.68 put into the equations, which are from memory, apart."""
    found = ask(server, "in-place-density", body)["places"]
    assert found["gravimetric_water_content"] == pytest.approx(0.14, abs=1e-6)
    assert found["bulk_density"] == pytest.approx(1.68, abs=1e-6)
    assert found["water_content"] == pytest.approx(0.2352, abs=1e-6)
    assert found["total_density"] == pytest.approx(1.68 * 1.14, abs=2e-6)
    assert found["flags"] == []


def test_uncertainties_are_those_of_linear_propagation(server):
    field, mould, total = ufloat(FIELD, 0.1), ufloat(MOULD, 0.1), ufloat(1.995, 0.01)
    a, b, largest = ufloat(1.0, 0.02), ufloat(8.5, 0.1), ufloat(1.75, 0.01)
    wetness = (sqrt(mould) - a * total) / (b * total - sqrt(mould))
    dry = sqrt(field / mould) * total / (1 + wetness)
    found = ask(server, "in-place-density", {
        "coefficients": {"a": 1.0, "a_u": 0.02, "b": 8.5, "b_u": 0.1},
        "mould": {"apparent_permittivity": MOULD, "apparent_permittivity_u": 0.1,
                  "total_density": 1.995, "total_density_u": 0.01},
        "places": {"apparent_permittivity": FIELD, "apparent_permittivity_u": 0.1},
        "largest_bulk_density": 1.75, "largest_bulk_density_u": 0.01,
    })["places"]  # fmt: skip
    expected = {"gravimetric_water_content": wetness, "bulk_density": dry,
                "water_content": wetness * dry, "compaction": dry / largest}  # fmt: skip
    for name, value in expected.items():
        assert found[name] == pytest.approx(value.nominal_value, rel=1e-6)
        assert found[f"{name}_u"] == pytest.approx(value.std_dev, rel=5e-3)


def test_two_equations_that_are_nearly_one_give_no_number(server):
    """a d - b c = 0.35; 0.085 and 0.255 from c, 0.01 from d: told apart with the first alone."""
    for u, flags in ((0.01, []), (0.03, ["ill-conditioned"])):
        body = ONE_STEP | {"coefficients": {**ONE_STEP["coefficients"], "c_u": u, "d_u": 0.01}}
        found = ask(server, "in-place-density", body)["places"]
        assert found["flags"] == flags
        assert (found["bulk_density"] is None) == bool(flags)
        assert found["condition_number"] > 10


def test_c_and_d_are_for_the_unit_of_the_request(server):
    """In mS/m conductivities are 100 times as large, c and d 10 times: the same soil."""
    body = {
        "method": "one-step",
        "coefficients": {"a": 1.0, "b": 8.5, "c": 1.0, "d": 12.0},
        "places": {"apparent_permittivity": FIELD, "standard_conductivity": 100 * SALTY},
        "units": {"standard_conductivity": "mS/m"},
    }
    answer = ask(server, "in-place-density", body)
    assert answer["places"]["bulk_density"] == pytest.approx(1.68, abs=1e-6)
    (said,) = (a["text"] for a in answer["advisories"] if a["code"] == "conductivity-standard")
    assert said.endswith("in mS/m.")


@pytest.mark.parametrize(
    ("kind", "temperature", "factor"),
    [("cohesionless", 4, 0.976), ("cohesionless", 40, 1.03), ("cohesive", 10, 1.05),
     ("cohesive", 20, 1.0), ("cohesive", 30, 0.95)],
)  # fmt: skip
def test_permittivity_is_brought_to_20_degrees(server, kind, temperature, factor):
    """Factors computed apart from equations from memory."""
    body = changed(ONE_STEP, ("places", "temperature"), temperature) | {"soil_kind": kind}
    body = changed(body, ("places", "apparent_permittivity"), FIELD / factor)
    answer = ask(server, "in-place-density", body)
    assert answer["places"]["apparent_permittivity_20"] == pytest.approx(FIELD)
    assert "apparent_permittivity_20" not in answer["places"]["used"]
    assert answer["places"]["bulk_density"] == pytest.approx(1.68, abs=1e-6)
    assert "twenty-degrees-from-memory" in codes(answer)
    assert "not-brought-to-20-degrees" not in codes(answer)


def test_a_mould_of_unknown_temperature_leaves_all_as_read(server):
    """Both at one temperature err alike; one of them brought to 20 Cel would not."""
    body = changed(TWO_STEP, ("places", "temperature"), 35) | {"soil_kind": "cohesive"}
    answer = ask(server, "in-place-density", body)
    assert answer["places"]["bulk_density"] == pytest.approx(1.68, abs=1e-6)
    assert "not-brought-to-20-degrees" in codes(answer)
    both = changed(body, ("mould", "temperature"), 35)
    answer = ask(server, "in-place-density", both)
    assert answer["mould"]["apparent_permittivity_20"] == pytest.approx(0.925 * MOULD)
    assert "not-brought-to-20-degrees" not in codes(answer)


def test_outside_4_to_40_degrees_there_is_no_number(server):
    body = changed(ONE_STEP, ("places", "temperature"), 45) | {"soil_kind": "cohesive"}
    found = ask(server, "in-place-density", body)["places"]
    assert found["bulk_density"] is None
    assert found["flags"] == ["outside-temperature-adjustment"]


def test_what_no_soil_shows_has_no_number(server):
    """sqrt(199) is above b times the total density, 9.975: a wetness below zero."""
    body = changed(TWO_STEP, ("mould", "apparent_permittivity"), 199)
    body = changed(body, ("coefficients", "b"), 5.0)
    found = ask(server, "in-place-density", body)["places"]
    assert found["bulk_density"] is None
    assert found["flags"] == ["no-physical-answer"]
