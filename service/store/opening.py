"""The store that the settings name."""

from pathlib import Path

from service.settings import Settings
from service.store.base import SqlStore
from service.store.sqlite import FILE, SqliteStore


def store_of(settings: Settings) -> SqlStore:
    """PostgreSQL where a URL is set, else one file in the data folder; not looked at yet.

    Raises StoreUnavailable.
    """
    if settings.database_url:
        from service.store.postgresql import PostgresqlStore  # noqa: PLC0415 - an extra

        return PostgresqlStore(settings.database_url)
    return SqliteStore(settings.data / FILE)


def missing_file(settings: Settings) -> Path | None:
    """The file that the settings mean and that is not there; None: it is, or no file is meant."""
    file = None if settings.database_url else settings.data / FILE
    return file if file is not None and not file.exists() else None


def open_store(settings: Settings) -> SqlStore:
    """The store, its tables made where there were none.

    Raises StoreUnavailable; SchemaError where the tables are of another version.
    """
    store = store_of(settings)
    store.prepare()
    return store
