"""Declared uncertainties of the default water model cover what other models say."""

import numpy as np
import pytest

from models.water import DEFAULT_WATER, WATER_MODELS, kaatze_1989

FREQUENCY = np.geomspace(1e7, 1e10, 31)[:, None]
SALT = np.array([0.05, 0.1, 0.5, 1.0, 2.0])  # S/m
MODEL = WATER_MODELS[DEFAULT_WATER]


def standard_uncertainty(frequency, temperature):
    """Of real part and loss, from the three declared errors, by differences to both sides."""
    debye = kaatze_1989.debye(temperature)

    def change(**errors):
        up = debye._replace(**{name: getattr(debye, name) + e for name, e in errors.items()})
        down = debye._replace(**{name: getattr(debye, name) - e for name, e in errors.items()})
        return (np.array(up.parts(frequency)) - down.parts(frequency)) / 2

    return np.sqrt(
        change(static=MODEL.static_uncertainty) ** 2
        + change(infinite=MODEL.infinite_uncertainty) ** 2
        + change(relaxation_time=MODEL.relaxation_time_uncertainty * debye.relaxation_time) ** 2
    )


def test_other_models_of_pure_water_agree_within_it():
    inside, asked = 0, 0
    for key in ("turner-kneifel-cadeddu-2016", "meissner-wentz-2012"):
        other = WATER_MODELS[key]
        temperature = np.linspace(0.0, other.validity["temperature"].high, 21)
        away = np.array(other.parts(FREQUENCY, temperature)) - MODEL.parts(FREQUENCY, temperature)
        within = np.abs(away) <= 2 * standard_uncertainty(FREQUENCY, temperature)
        inside, asked = inside + within.sum(), asked + within.size
    assert inside / asked >= 0.95


@pytest.mark.parametrize(
    ("gigahertz", "temperature", "real", "loss"),
    [
        # Relative, in percent: worked out apart from this package from the same three errors.
        (0.5, 25.0, 0.06, 1.65),
        (1.0, 25.0, 0.06, 1.6),
        (3.0, 25.0, 0.09, 1.5),
        (3.0, 5.0, 0.22, 1.5),
        (10.0, 25.0, 0.61, 1.0),
        (10.0, 5.0, 1.33, 1.0),
    ],
)
def test_it_grows_with_frequency(gigahertz, temperature, real, loss):
    parts = np.array(MODEL.parts(gigahertz * 1e9, temperature))
    percent = 100 * standard_uncertainty(gigahertz * 1e9, temperature) / parts
    assert percent[0] == pytest.approx(real, abs=0.006)
    assert percent[1] == pytest.approx(loss, abs=0.41 if gigahertz == 10 else 0.11)


def test_effect_of_salt_agrees_with_diluted_sea_water_within_it():
    sea = WATER_MODELS["meissner-wentz-2012"]
    ours = 1 - MODEL.parts(1e7, 25.0, SALT)[0] / MODEL.static(25.0)
    theirs = 1 - sea.parts(1e7, 25.0, SALT)[0] / sea.static(25.0)
    assert np.all(np.abs(theirs - ours) <= 2 * MODEL.salt_effect_uncertainty * ours)
