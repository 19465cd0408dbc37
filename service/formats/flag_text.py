"""Flags as text: one bit a slug becomes slugs, each combination spelt once."""

from collections.abc import Callable

import numpy as np
import orjson
import polars as pl
from numpy.typing import NDArray

from models.flags import Flags, slugs_of


def flags_as_csv(flags: Flags) -> pl.Series:
    """Slugs joined by semicolons; empty where there is nothing to say."""
    return _spelt(flags, ";".join)


def flags_as_json(flags: Flags) -> pl.Series:
    """Lists of slugs, as JSON text."""
    return _spelt(flags, lambda slugs: orjson.dumps(slugs).decode())


def combinations(flags: Flags) -> tuple[list[list[str]], NDArray[np.intp]]:
    """Every combination of flags there is, spelt out, and which of them each row has."""
    if not flags.any():
        return [[]], np.zeros(flags.size, dtype=np.intp)
    masks, places = _masks(flags)
    return [list(slugs_of(mask)) for mask in masks.tolist()], places


def _spelt(flags: Flags, spell: Callable[[tuple[str, ...]], str]) -> pl.Series:
    """As many pieces of text as rows, by as many calls as there are combinations."""
    if not flags.any():
        return pl.repeat(spell(()), len(flags), dtype=pl.String, eager=True)
    masks, places = _masks(flags)
    words = [spell(slugs_of(mask)) for mask in masks.tolist()]
    return pl.Series(words, dtype=pl.String).gather(places)


def _masks(flags: Flags) -> tuple[Flags, NDArray[np.intp]]:
    """The few different masks there are, and which of them each row has."""
    if flags.size < 100:
        return np.unique(flags, return_inverse=True)
    masks: Flags = np.sort(pl.Series(flags).unique().to_numpy())
    return masks, np.searchsorted(masks, flags)
