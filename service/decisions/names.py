"""Names of a request that are none."""

from collections.abc import Iterable

from service.faults import hint, shown


def unknown(kind: str, found: str, known: Iterable[str]) -> str:
    """What is wrong with a name that is none, and the nearest that there is."""
    names = list(known)
    meant = hint(found.lower(), names) or f"; choose one of {', '.join(names)}"
    return f"no {kind} is called {shown(found)}{meant}"
