"""Units of a spectrum's request that are none, or another: what to send."""

import pytest

from tests.service.spectra.test_spectra import post, request


@pytest.mark.parametrize(("change", "sentence", "place"), [
    ({"units": {"frequncy": "GHz"}}, "did you mean frequency?", "#/units/frequncy"),
    ({"cell": {"capacitance": 1.0}}, "in pF? send 1e-12", "#/cell/capacitance"),
])  # fmt: skip
def test_other_units_are_told_what_to_send(server, change, sentence, place):
    answer = post(server, request(**change))
    assert answer.status_code == 422, answer.text
    (fault,) = answer.json()["errors"]
    assert sentence in fault["detail"]
    assert fault["pointer"] == place
