"""A trace of nothing but noise shows no end of a probe, by whichever method it is read."""

import json

import numpy as np
import pytest

from tests.service.conftest import ROOT


@pytest.mark.parametrize("example", ["whole_trace", "travel_time"])
def test_noise_has_no_number(server, example):
    path = ROOT / "openapi_examples" / f"post_waveforms.{example}.json"
    request = json.loads(path.read_text("utf-8"))["request"]["json"]
    traces = request["waveforms"]
    traces = traces if isinstance(traces, list) else [traces]
    generator = np.random.default_rng(3)
    for trace in traces:
        count = len(trace["reflection_coefficient"])
        trace["reflection_coefficient"] = generator.normal(0.0, 0.3, count).round(5).tolist()
    answer = server.client.post("/v1/waveforms", json=request, timeout=60)
    assert answer.status_code == 200, answer.text
    told = answer.json()["waveforms"]
    for row in told if isinstance(told, list) else [told]:
        assert row["apparent_permittivity"] is None
        assert "no-end-reflection" in row["flags"]
