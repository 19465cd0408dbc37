"""/metrics counts what was committed to the store, by whichever process."""

import re

import httpx2
import pytest

from tests.service.conftest import command
from tests.service.stations.farm import furnish, post, reading
from tests.service.stores import KINDS, settings_of


def commits(service):
    text = service.client.get("/metrics").text
    return float(re.search(r"^gleyline_store_commits_total (\S+)$", text, re.MULTILINE)[1])


@pytest.mark.parametrize("workers", [1, 2])
@pytest.mark.parametrize("kind", KINDS)
def test_every_commit_is_counted_once_whoever_made_it(tmp_path, kind, workers):
    with (
        settings_of(kind, tmp_path) as settings,
        command(tmp_path, workers=workers, **settings) as service,
    ):
        furnish(service.client)
        before = commits(service)
        assert before >= 4  # a soil, two probes, a station
        for minute in range(20):  # each by a connection of its own, so that both processes answer
            with httpx2.Client(base_url=service.base_url, timeout=20) as client:
                assert post(client, [reading(minute)]).json()["accepted"] == 1
        assert commits(service) == before + 20
        refused = post(service.client, [{**reading(30), "time": "yesterday"}]).json()
        assert len(refused["rejected"]) == 1
        service.client.get("/v1/stations/north-1/estimates")
        assert commits(service) <= before + 21
