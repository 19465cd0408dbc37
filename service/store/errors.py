"""What a store refuses, and why.

StoreError
    StoreUnavailable    the database cannot be reached, or failed
    SchemaError         the tables are not those of this version
    Stale               soils, probes or stations changed since the caller looked
    Changed             a document is not at the revision the caller expected
    InUse               readings or stations refer to what should be deleted
    RestoreError        an export cannot be put in
"""


class StoreError(Exception):
    """A store did not do as it was asked."""

    def told(self) -> str:
        """With what the database said: for whoever runs the service, not for its clients."""
        return f"{self} ({reason_of(self.__cause__)})" if self.__cause__ else str(self)


def reason_of(error: BaseException) -> str:
    """The first line of what a database driver says."""
    return str(getattr(error, "orig", None) or error).partition("\n")[0][:300]


class StoreUnavailable(StoreError):
    """The database cannot be reached, or failed; nothing of the request was kept."""


class SchemaError(StoreError):
    """The tables are not those of this version of the service."""


class Stale(StoreError):
    """Soils, probes or stations changed since the caller looked: look again, then ask again."""


class Changed(StoreError):
    """A document is not at the revision that the caller expected.

    current: its revision; 0: there is none.
    """

    def __init__(self, current: int) -> None:
        super().__init__(f"the current revision is {current}")
        self.current = current


class InUse(StoreError):
    """Readings or stations refer to what should be deleted."""


class RestoreError(StoreError):
    """An export cannot be put in; nothing of it was."""
