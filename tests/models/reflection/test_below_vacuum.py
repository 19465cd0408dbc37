"""A permittivity below that of vacuum is no number: it is a length in another unit, most often."""

import numpy as np

from models.reflection.estimates import Band, flag_loss, kept
from models.reflection.sweep_flags import keys_of

EPS = np.array([[0.002 - 0j, 0.95 - 0j, 0.7 - 0j, 4.0 - 0.1j]])
WIDTH = np.array([[1e-4, 1e-4, 0.2, 0.01]])


def test_less_than_nothing_is_flagged_and_withheld_in_both_parts():
    flags = np.zeros(EPS.shape, dtype=np.uint64)
    none = np.zeros(EPS.shape)
    flag_loss(EPS, Band(WIDTH, WIDTH, none, none), flags)
    assert [bool(keys_of(int(mask))) for mask in flags[0]] == [True, False, False, False]
    assert keys_of(int(flags[0, 0])) == ("below-vacuum",)
    withheld = kept(EPS, flags)
    assert np.isnan(withheld[0, 0].real)
    assert np.isnan(withheld[0, 0].imag)
    assert withheld[0, 3] == EPS[0, 3]


def test_what_only_a_short_has_is_no_permittivity():
    """10 S/m, more than any soil or sea, are 1.8e5 at 1 MHz."""
    eps = np.array([[-1.04e8 - 5e7j, 3.2e10 + 0j, 80.0 - 1.8e5j]])
    flags = np.zeros(eps.shape, dtype=np.uint64)
    wide = np.full(eps.shape, 1e9)
    flag_loss(eps, Band(wide, wide, wide, wide), flags)
    assert [keys_of(int(mask)) for mask in flags[0]] == [("no-root",), ("no-root",), ()]
    assert np.isnan(kept(eps, flags)).tolist() == [[True, True, False]]
