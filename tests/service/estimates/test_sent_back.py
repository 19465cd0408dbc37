"""What an answer says it rests on can be sent again, and gives the same numbers."""

import pytest

PARTS = ("mixing_model", "pore_water_model", "soil", "probe")
READING = {
    "apparent_permittivity": 17.2, "apparent_permittivity_u": 0.3, "temperature": 14,
    "temperature_u": 0.3, "bulk_conductivity": 0.8, "bulk_conductivity_u": 0.03,
}  # fmt: skip


@pytest.mark.parametrize("soil", [
    {"texture": "loam"}, {"texture": "sandy-loam", "bulk_density": 1.3},
], ids=str)  # fmt: skip
@pytest.mark.parametrize("mixing", ["crim", "topp-1980", "maxwell-garnett", "complex-refractive"])
@pytest.mark.parametrize("pore_water", ["archie-1942", "hilhorst-2000", "rhoades-1976",
                                        "rhoades-1989", "complex-refractive"])  # fmt: skip
def test_the_numbers_return(server, soil, mixing, pore_water):
    """Above all the band of the salt: a default that is sent back is no fit of the site."""
    asked = {"mixing_model": mixing, "pore_water_model": pore_water, "soil": soil,
             "probe": {"frequency": 8e8}, "readings": [READING]}  # fmt: skip
    first = server.client.post("/v1/estimates", json=asked).json()
    assert first["estimates"][0]["pore_water_conductivity"] > 0
    again = asked | {part: first[part] for part in PARTS}
    second = server.client.post("/v1/estimates", json=again).json()
    for name, value in first["estimates"][0].items():
        found = second["estimates"][0][name]
        assert found == (pytest.approx(value, rel=1e-6) if isinstance(value, float) else value), (
            name
        )
