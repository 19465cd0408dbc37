"""What an answer to few readings rests on, settled once for all requests that say the same."""

from collections.abc import Iterable
from dataclasses import dataclass
from functools import lru_cache

import orjson

from models.advisories import Advice
from models.estimate import Basis, columns_of
from service.answers.advice import advice_on_columns
from service.formats.json.estimates import PASSED
from service.formats.json.readings import TEXTS
from service.schemas.echo import echo_of, units_of_answer
from service.schemas.estimates import EstimatesSettings
from service.schemas.query import basis_of, settings_of

KEPT = 256
"""How many are kept, those that were asked for last."""
LONGEST = 16_384
"""Bytes of a document, without its readings, above which nothing of it is kept."""


@dataclass(frozen=True, slots=True, eq=False)
class Prepared:
    """Everything of a request but its readings; the same object for the same words."""

    settings: EstimatesSettings
    basis: Basis
    numbers: tuple[str, ...]
    """Columns of the readings that hold numbers."""
    texts: tuple[str, ...]
    names: tuple[str, ...]
    """Columns of the answer, without the flags."""
    said: tuple[Advice, ...]
    """Advisories that the names of its columns give rise to."""
    rest: bytes
    """What stands behind the estimates, as JSON without its opening brace, of readings that give
    rise to no advisory of their own."""

    def rest_with(self, remarks: Iterable[Advice]) -> bytes:
        """The same, of readings that give rise to these advisories."""
        return _rest(self.settings, self.basis, self.names, (*self.said, *remarks))


def prepared(said: bytes, columns: tuple[str, ...]) -> Prepared | None:
    """What a document rests on; None where that is more than one model.

    said: the document without its readings, as JSON.
    columns: names of the readings' columns, in order.
    Raises Unprocessable and ModelError, as for any document.
    """
    if len(said) > LONGEST:
        return _prepared(said, columns)
    return _kept(said, columns)


def _prepared(said: bytes, columns: tuple[str, ...]) -> Prepared | None:
    settings = settings_of(orjson.loads(said))
    numbers = tuple(name for name in columns if name not in TEXTS)
    texts = tuple(name for name in columns if name in TEXTS)
    basis = basis_of(settings, (*numbers, *texts))
    if not isinstance(basis, Basis):
        return None
    passed = [name for kind in (texts, numbers) for name in PASSED if name in kind]
    names = (*passed, *columns_of(basis))
    named = advice_on_columns((), numbers)
    rest = _rest(settings, basis, names, named)
    return Prepared(settings, basis, numbers, texts, names, named, rest)


_kept = lru_cache(KEPT)(_prepared)


def _rest(
    settings: EstimatesSettings, basis: Basis, names: Iterable[str], remarks: Iterable[Advice]
) -> bytes:
    units = {**units_of_answer(names, settings.units), **settings.units}
    return orjson.dumps({"units": units, **echo_of(basis, settings, remarks)})[1:]
