"""Bits of flags: each slug has its own, and masks come back as slugs in their order."""

import numpy as np
import pytest

from models.flagging import Bits, any_of
from models.flags import BIT, SLUGS, slugs_of
from models.reflection import sweep_flags

FRUIT = Bits(("apple", "pear", "plum"))


def test_a_mask_comes_back_as_its_slugs_in_their_order():
    mask = FRUIT.bit["plum"] | FRUIT.bit["apple"]
    assert FRUIT.names(int(mask)) == ("apple", "plum")
    assert FRUIT.names(0) == ()


def test_rows_with_one_of_several_bits_are_found():
    column = np.array([0, FRUIT.bit["pear"], FRUIT.bit["plum"]], dtype=np.uint64)
    assert any_of(column, FRUIT.those(lambda slug: slug[0] == "p")).tolist() == [False, True, True]
    assert any_of(column, FRUIT.those(str.isdigit)).tolist() == [False, False, False]


@pytest.mark.parametrize(("bit", "names"), [
    (BIT, slugs_of), (sweep_flags.BIT, sweep_flags.keys_of),
], ids=["readings", "sweeps"])  # fmt: skip
def test_every_flag_has_a_bit_of_its_own(bit, names):
    assert len({int(one) for one in bit.values()}) == len(bit) <= 64
    for slug, one in bit.items():
        assert names(int(one)) == (slug,)


def test_every_slug_of_readings_has_a_bit():
    assert tuple(BIT) == SLUGS
