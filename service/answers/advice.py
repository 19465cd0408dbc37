"""What an answer must say of the names it was sent: columns, uncertainties, draws."""

from collections.abc import Collection, Iterable, Sequence

from models.advisories import Advice, advise
from models.estimate import Basis, Remarks
from models.estimate.beside.ensemble import EveryModel
from service.formats.errors import shown
from service.formats.header import alone, not_read
from service.schemas.estimates import EstimatesSettings, Propagation

MOST_NAMES = 20
"""Columns that were not read of which an answer tells."""
MOST_TOLD = 5
"""Texts that a header holds; of the others it says how many there are."""
LONGEST = 300
"""Characters of one of them."""
ALWAYS = frozenset(Propagation.model_fields)


def advice_on_columns(names: Iterable[str], read: Collection[str]) -> tuple[Advice, ...]:
    """Of columns that are none of ours and nearly one, and of uncertainties without a value.

    names: of the columns of a table, as they stand there. read: of those that are read.
    """
    near = not_read(names, read)[:MOST_NAMES]
    said = [advise("name-not-known", name=shown(n), meant=" or ".join(m)) for n, m in near]
    said += [
        advise("uncertainty-alone", name=name, about=name.removesuffix("_u"))
        for name in alone(read)
    ]
    return tuple(said)


def advice_on_settings(settings: EstimatesSettings) -> tuple[Advice, ...]:
    """Of draws that were described and not asked for.

    An answer sent back describes them as well, with everything else of its propagation.
    """
    asked = settings.propagation
    given = asked.model_fields_set
    named = [name for name in ("draws", "seed") if name in given]
    if asked.method == "monte-carlo" or not named or given >= ALWAYS:
        return ()
    return (advise("draws-not-made", names=" and ".join(named)),)


def remarks_of(basis: Basis | EveryModel | None) -> Remarks:
    """Where what readings give rise to is gathered."""
    return Remarks() if basis is None else Remarks(basis.query.probe.get("probe_length"))


def in_a_header(name: str, texts: Sequence[str]) -> dict[str, str]:
    """Texts as far as a header can hold them; no header where there are none."""
    if not texts:
        return {}
    whole = [text.removesuffix(".") for text in texts]
    told = [text if len(text) <= LONGEST else f"{text[: LONGEST - 3]}..." for text in whole]
    if len(texts) > MOST_TOLD:
        told[MOST_TOLD:] = [f"and {len(texts) - MOST_TOLD} more"]
    return {name: "; ".join(told).encode("ascii", "backslashreplace").decode()}
