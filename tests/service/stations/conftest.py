"""A running service with one station, whatever it keeps things in."""

import pytest

from tests.service.conftest import command
from tests.service.stations.farm import furnish
from tests.service.stores import KINDS, settings_of


@pytest.fixture(scope="module", params=KINDS)
def farm(request, tmp_path_factory):
    """The service over a store of each kind, furnished."""
    folder = tmp_path_factory.mktemp("farm")
    with settings_of(request.param, folder) as settings, command(folder, **settings) as service:
        furnish(service.client)
        yield service


@pytest.fixture(scope="module")
def client(farm):
    return farm.client


@pytest.fixture
def sqlite_farm(tmp_path):
    """The service over a file of its own."""
    with command(tmp_path) as service:
        furnish(service.client)
        yield service
