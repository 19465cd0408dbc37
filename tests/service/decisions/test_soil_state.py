"""POST /v1/soil-state against exact identities and linear propagation."""

import pytest
from uncertainties import ufloat

from tests.service.decisions.asking import ask, codes

FILL = {"water_content": 0.24, "bulk_density": 1.6, "particle_density": 2.65}


def soil(server, more=None, **whole):
    """The answer about one soil."""
    return ask(server, "soil-state", {"soils": {**FILL, **(more or {})}, **whole})["soils"]


def test_the_phase_relations(server):
    """w 0.15, dry density 1.60, Gs 2.65: exact identities, computed apart."""
    found = soil(server, {"largest_bulk_density": 1.75})
    expected = {
        "gravimetric_water_content": 0.15, "porosity": 0.39622642, "void_ratio": 0.65625,
        "degree_of_saturation": 0.60571429, "total_density": 1.84, "air_content": 0.15622642,
        "zero_air_density": 1.89624329, "compaction": 1.6 / 1.75,
    }  # fmt: skip
    assert {name: found[name] for name in expected} == pytest.approx(expected, rel=4e-8)
    assert found["flags"] == []


def test_uncertainties_are_those_of_linear_propagation(server):
    theta, dry, solid = ufloat(0.24, 0.01), ufloat(1.6, 0.02), ufloat(2.65, 0.015)
    largest = ufloat(1.75, 0.01)
    found = soil(server, {"water_content_u": 0.01, "bulk_density_u": 0.02,
                          "particle_density_u": 0.015, "largest_bulk_density": 1.75,
                          "largest_bulk_density_u": 0.01})  # fmt: skip
    expected = {
        "gravimetric_water_content": theta / dry,
        "porosity": 1 - dry / solid,
        "degree_of_saturation": theta / (1 - dry / solid),
        "total_density": dry + theta,
        "zero_air_density": solid / (1 + theta * solid / dry),
        "compaction": dry / largest,
    }
    for name, value in expected.items():
        assert found[f"{name}_u"] == pytest.approx(value.std_dev, rel=2e-3)
        half = (found[f"{name}_upper"] - found[f"{name}_lower"]) / 2
        assert half == pytest.approx(1.96 * value.std_dev, rel=3e-3)


def test_more_water_than_pores_is_flagged_and_not_cut(server):
    """0.45 of water in 0.39623 of pores: 1.13571 times saturated, computed apart."""
    found = soil(server, {"water_content": 0.45})
    assert found["flags"] == ["water-exceeds-pores"]
    assert found["degree_of_saturation"] == pytest.approx(0.45 / 0.39622642, rel=1e-7)
    assert found["air_content"] == pytest.approx(-0.05377358, rel=1e-6)


def test_a_soil_that_may_be_saturated_says_so(server):
    found = soil(server, {"water_content": 0.39, "water_content_u": 0.01})
    assert found["flags"] == ["saturation-not-told-apart"]
    found = soil(server, {"water_content": 0.40, "water_content_u": 0.01})
    assert found["flags"] == ["water-exceeds-pores", "saturation-not-told-apart"]


def test_denser_than_its_solids_has_no_pores(server):
    found = soil(server, {"particle_density": 1.5})
    assert found["porosity"] is found["degree_of_saturation"] is found["void_ratio"] is None
    assert "denser-than-solids" in found["flags"]
    assert found["gravimetric_water_content"] == pytest.approx(0.15)


def test_a_particle_density_of_ours_has_a_band_and_is_said(server):
    body = {"soils": {"water_content": 0.24, "bulk_density": 1.6}}
    answer = ask(server, "soil-state", body)
    assert answer["soils"]["used"]["particle_density"] == pytest.approx(2.65)
    assert answer["soils"]["used"]["particle_density_u"] == pytest.approx(0.05)
    assert answer["soils"]["porosity_u"] == pytest.approx(1.6 * 0.05 / 2.65**2, rel=1e-3)
    assert "particle-density-assumed" in codes(answer)


def test_units_of_the_caller_go_in_and_come_out(server):
    body = {"soils": {"water_content": 24, "bulk_density": 1600, "particle_density": 2650},
            "units": {"water_content": "%", "bulk_density": "kg/m3", "particle_density": "kg/m3",
                      "total_density": "kg/m3"}}  # fmt: skip
    answer = ask(server, "soil-state", body)
    assert answer["soils"]["total_density"] == pytest.approx(1840)
    assert answer["soils"]["zero_air_density"] == pytest.approx(1.89624329, rel=4e-8)
    assert answer["soils"]["used"]["bulk_density"] == pytest.approx(1600)
    assert answer["units"]["zero_air_density"] == "g/cm3"
