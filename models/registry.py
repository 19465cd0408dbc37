"""A closed, ordered set of declarations of one family, looked up by key."""

from collections.abc import Iterator, Mapping
from typing import Generic, Protocol, TypeVar

from models.errors import UnknownName


class Keyed(Protocol):
    """Whatever has a key."""

    @property
    def key(self) -> str:
        """The name it is looked up by."""
        ...


M = TypeVar("M", bound=Keyed)


class Registry(Mapping[str, M], Generic[M]):
    """Immutable: what the service offers is decided where the family is declared."""

    def __init__(self, family: str, *members: M) -> None:
        self.family = family
        self._members = {member.key: member for member in members}
        if len(self._members) != len(members):
            raise ValueError(f"two {family}s share a key")

    def __getitem__(self, key: str) -> M:
        try:
            return self._members[key]
        except KeyError:
            raise UnknownName(self.family, key, self._members) from None

    def __contains__(self, key: object) -> bool:
        return key in self._members

    def __iter__(self) -> Iterator[str]:
        return iter(self._members)

    def __len__(self) -> int:
        return len(self._members)
