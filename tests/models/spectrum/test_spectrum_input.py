"""A spectrum that cannot be one is refused by the name of what is wrong."""

import numpy as np
import pytest
from numpy.testing import assert_allclose

from models.errors import ParameterError
from models.spectrum import Question, interpret, spectrum_of
from models.spectrum.form import Form
from tests.models.spectrum.dielectrics import BAND, loam, spectrum

EPS = loam(BAND)
ASKED = Question(form=Form(("cole-cole", "debye")))
GOOD = {"frequency": BAND, "real": EPS.real, "loss": -EPS.imag}
BAD = {
    "a frequency that goes back": ({"frequency": np.r_[BAND[:9], BAND[3], BAND[10:]]},
                                   "frequency", "place 9 holds .*counted from 0"),
    "a frequency that comes twice": ({"frequency": np.r_[BAND[:9], BAND[8], BAND[10:]]},
                                     "frequency", "merge repeats"),
    "unequal lengths": ({"loss": -EPS.imag[:-1]}, "imaginary_permittivity",
                        "has 59 values where frequency has 60"),
    "frequencies in MHz": ({"frequency": BAND / 1e6}, "frequency", "looks like MHz"),
    "frequencies in GHz": ({"frequency": BAND / 1e9}, "frequency", "looks like GHz"),
    "a frequency of zero": ({"frequency": np.r_[0.0, BAND[1:]]}, "frequency", "above 0 Hz"),
    "no number": ({"real": np.r_[np.nan, EPS.real[1:]]}, "real_permittivity", "finite"),
    "an infinite frequency": ({"frequency": np.r_[BAND[:-1], np.inf]}, "frequency", "finite"),
    "a permittivity below vacuum": ({"real": -EPS.real}, "real_permittivity", "at least 1"),
    "a loss beyond any cell": ({"loss": np.full(60, 1e200)}, "imaginary_permittivity", "at most"),
    "an uncertainty of zero": ({"real_u": np.zeros(60), "loss_u": np.ones(60)},
                               "real_permittivity_u", "above 0"),
    "half an uncertainty": ({"real_u": np.ones(60)}, "imaginary_permittivity_u", "both parts"),
    "too few uncertainties": ({"real_u": np.ones(3), "loss_u": np.ones(60)},
                              "real_permittivity_u", "has 3 values"),
    "two points": ({name: part[:2] for name, part in GOOD.items()}, "frequency", "at least 3"),
}  # fmt: skip


@pytest.mark.parametrize(("change", "name", "words"), BAD.values(), ids=BAD)
def test_a_spectrum_that_is_none_is_refused_by_name(change, name, words):
    with pytest.raises(ParameterError, match=words) as refused:
        spectrum_of(**(GOOD | change))
    assert name in {complaint.name for complaint in refused.value.complaints}
    assert all(one.place[0] == "spectrum" for one in refused.value.complaints)


def test_the_other_time_convention_is_turned_once_and_said():
    turned = spectrum_of(BAND, EPS.real, EPS.imag)
    assert turned.conjugated
    assert_allclose(turned.permittivity, EPS)
    found = interpret(turned, ASKED)
    assert [f.flag for f in found.findings].count("conjugated") == 1
    straight = interpret(spectrum(BAND, EPS), ASKED)
    assert_allclose(found.choice.fit.vector, straight.choice.fit.vector)


def test_single_points_below_zero_are_noise_and_stay():
    random = np.random.default_rng(2)
    noisy = spectrum_of(BAND[::4], np.full(15, 5.0), 0.01 + 0.02 * random.standard_normal(15))
    assert not noisy.conjugated
    assert np.any(noisy.permittivity.imag > 0)
    assert "loss-below-zero" in {f.flag for f in interpret(noisy, Question(form=Form())).findings}


def test_a_falling_frequency_is_as_good_as_a_rising_one():
    there = interpret(spectrum(BAND, EPS), ASKED).choice.fit
    back = interpret(spectrum(BAND[::-1], EPS[::-1]), ASKED).choice.fit
    assert_allclose(back.form.values(back.vector), there.form.values(there.vector), rtol=1e-6)
