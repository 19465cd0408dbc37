"""The body of everything that is refused: RFC 9457 problem details."""

from collections.abc import Mapping, Sequence
from typing import Any, ClassVar

from starlette.exceptions import HTTPException

from service.faults import Fault

MOST_FAULTS = 20
"""Items that an answer lists; of the others it says how many there are."""


class Problem(HTTPException):
    """A request that is not answered as asked; ``detail`` says what to change."""

    status: ClassVar[int]
    slug: ClassVar[str]

    def __init_subclass__(cls, *, status: int, slug: str) -> None:
        cls.status, cls.slug = status, slug

    def __init__(
        self,
        detail: object,
        errors: Sequence[Fault] = (),
        headers: Mapping[str, str] | None = None,
        more: int = 0,
    ) -> None:
        """more: how many items are wrong beside ``errors``."""
        super().__init__(self.status, str(detail) or self.title(), dict(headers or {}))
        self.errors, self.more = tuple(errors), more

    @classmethod
    def title(cls) -> str:
        """What all problems of this kind have in common."""
        return (cls.__doc__ or "").partition("\n")[0].rstrip(".")

    @classmethod
    def meaning(cls) -> str:
        """What the caller can do about it."""
        return " ".join((cls.__doc__ or "").partition("\n")[2].split())

    def document(self, request_id: str) -> dict[str, Any]:
        """The body of the answer, without empty members."""
        body: dict[str, Any] = {
            "type": f"/problems/{self.slug}",
            "title": self.title(),
            "status": self.status,
            "detail": self._first(),
            "request_id": request_id,
        }
        if self.errors:
            body["errors"] = [fault.as_json() for fault in self.errors[:MOST_FAULTS]]
        hidden = len(self.errors[MOST_FAULTS:]) + self.more
        if hidden:
            body["errors_not_shown"] = hidden
        return body

    def _first(self) -> str:
        """The detail, or the first of the items where the detail does not tell it."""
        if not self.errors or self.errors[0].detail in self.detail:
            return self.detail
        first, more = self.errors[0], len(self.errors) - 1 + self.more
        return f"{first.pointer}: {first.detail}" + (f"; and {more} more" if more else "")
