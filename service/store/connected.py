"""A database by its engine: transactions, and tables of the right version."""

import logging
from abc import ABC, abstractmethod
from collections.abc import Callable, Iterator
from contextlib import contextmanager
from pathlib import Path

from sqlalchemy import Connection, Engine, text
from sqlalchemy.exc import SQLAlchemyError

from service.store import schema
from service.store.errors import StoreUnavailable, reason_of
from service.store.interface import Head

log = logging.getLogger("gleyline.store")
_HEAD = text("SELECT revision, documents FROM store")


class Connected(ABC):
    """See Store."""

    def __init__(self, engine: Engine) -> None:
        self.engine = engine
        self.on_commit: Callable[[], object] = lambda: None
        """Called after each transaction that changed something; from any thread."""

    @abstractmethod
    def _lock(self, connection: Connection) -> None:
        """Let nobody else change the tables until the transaction ends."""

    @abstractmethod
    def check(self) -> Iterator[str]:
        """See Store."""

    @abstractmethod
    def backup(self, target: Path) -> None:
        """See Store."""

    @contextmanager
    def _transaction(self, *, write: bool) -> Iterator[Connection]:
        """A connection in a transaction, which is undone when the block raises."""
        try:
            with (
                self.engine.connect().execution_options(write=write) as connection,
                connection.begin(),
            ):
                yield connection
        except SQLAlchemyError as error:
            log.error("the store failed: %s", reason_of(error))  # noqa: TRY400 - one line will do
            raise StoreUnavailable(f"the store failed: {type(error).__name__}") from error
        if write:
            self.on_commit()

    def prepare(self) -> None:
        """Make the tables of an empty database; raises SchemaError for any other version."""
        with self._transaction(write=True) as connection:
            self._lock(connection)
            if (found := schema.version_of(connection)) == 0:
                schema.upgrade(connection)
            else:
                schema.refuse_version(found)

    def upgrade(self) -> tuple[int, int]:
        """Bring the tables to this version; the versions before and after."""
        with self._transaction(write=True) as connection:
            self._lock(connection)
            return schema.upgrade(connection)

    def close(self) -> None:
        """See Store."""
        self.engine.dispose()

    def head(self) -> Head:
        """See Store."""
        with self._transaction(write=False) as connection:
            return Head(*connection.execute(_HEAD).one())
