"""An empty store of each kind."""

import pytest

from service.settings import Settings
from service.store.opening import open_store
from tests.service.stores import KINDS, settings_of


@pytest.fixture(params=KINDS)
def settings(request, tmp_path):
    with settings_of(request.param, tmp_path) as given:
        yield Settings(**given)


@pytest.fixture
def store(settings):
    opened = open_store(settings)
    yield opened
    opened.close()
