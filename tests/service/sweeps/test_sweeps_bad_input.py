"""Sweeps that cannot be used: the field is named, and how to mend it; never a 500."""

import copy

import numpy as np
import pytest

from tests.models.reflection.sweep_records import tip_sweep
from tests.service.sweeps.asking import (
    STANDARDS,
    columns,
    refused,
    tip_request,
    two_port_text,
    with_standard,
)

FREQUENCY, LOAM = tip_sweep("loam")
AXIS = FREQUENCY.tolist()
READ = columns(LOAM)
FEWER = {"real": READ["real"][:-1], "imaginary": READ["imaginary"][:-1]}


def sample(**changes):
    return {"sample": {"frequency": AXIS, "reflection": READ, **changes}}


BACK = [*AXIS[:5], AXIS[3], *AXIS[6:]]
RADIANS = {"magnitude": np.abs(LOAM).tolist(), "degrees": np.angle(LOAM).tolist()}
CASES = [
    (with_standard(2, temperature=None), "temperature is missing", "#/standards/2/temperature"),
    (with_standard(3, name="water"), "is already standard 3", "#/standards/3/name"),
    (with_standard(3, name="open", temperature=None), "is already standard 2",
     "#/standards/3/name"),
    (with_standard(3, name="metanol"), "did you mean methanol?", "#/standards/3/name"),
    (with_standard(3, name="saline"), "conductivity_25 is missing",
     "#/standards/3/conductivity_25"),
    (with_standard(2, temperature=298.15), "looks like K", "#/standards/2/temperature"),
    (with_standard(3, name="load"), "needs C0", "#/standards/3/name"),
    (with_standard(3, touchstone=None), "reflection or touchstone", "#/standards/3"),
    (with_standard(3, touchstone="# GHz S RI R 50\n1 .5\n"), "line 2: expected 3 numbers",
     "#/standards/3/touchstone"),
    (with_standard(3, touchstone="# GHz S RI R 50\n1 .5 .1\n2 .5 .1\n"), "same frequencies",
     "#/standards/3/touchstone"),
    (with_standard(3, touchstone=None, frequency=[1e9, 2e9],
                   reflection={"real": [0.5, 0.5], "imaginary": [0.1, 0.1]}),
     "same frequencies", "#/standards/3/frequency"),
    (with_standard(3, imaginary_permittivity=-1.0, real_permittivity=30.0), "0 or above",
     "#/standards/3/imaginary_permittivity"),
    (with_standard(3, real_permittivity=[30.0, 31.0]), "where frequency has",
     "#/standards/3/real_permittivity"),
    (with_standard(3, reflection_u=0.001), "or of none", "#/standards/0/reflection_u"),
    ({"standards": STANDARDS[:2]}, "three standards or more", "#/standards"),
    (sample(frequency=BACK), "must rise all along; item 5", "#/sample/frequency"),
    (sample(frequency=[f / 1e9 for f in AXIS]), 'send "units": {"frequency": "GHz"}',
     "#/sample/frequency/0"),
    (sample(frequency=None), "give it here, or once", "#/sample/frequency"),
    (sample(reflection=FEWER), "values where frequency has", "#/sample/reflection"),
    (sample(reflection={"real": READ["real"], "imaginary": READ["imaginary"][:-1]}),
     "imaginary", "#/sample/reflection/imaginary"),
    (sample(reflection=[READ, FEWER]), "where frequency has", "#/sample/reflection/1"),
    (sample(reflection={"real": READ["real"]}), "real and imaginary", "#/sample/reflection"),
    (sample(reflection=RADIANS), "look like radians", "#/sample/reflection/degrees"),
    (sample(reflection={"real": (50 * LOAM.real).tolist(), "imaginary": READ["imaginary"]}),
     "in place of ohm", "#/sample/reflection"),
    (sample(reflection={"magnitude": [-12.5] * len(AXIS), "degrees": [10.0] * len(AXIS)}),
     "found -12.5: these look like decibels", "#/sample/reflection/magnitude/0"),
    (sample(reflection={"real": [*READ["real"][:4], 26.8, *READ["real"][5:]],
                        "imaginary": READ["imaginary"]}), "at point 5", "#/sample/reflection"),
    (with_standard(3, touchstone="# MHz S RI R 50\n0.03 .5 .1\n6 .5 .1\n"),
     "found 0.03 in the unit MHZ of the option line (line 1); in GHZ all are: change the unit",
     "#/standards/3/touchstone"),
    (sample(touchstone="x"), "found both", "#/sample"),
    (sample(reflection_u=[0.1, 0.1]), "where frequency has", "#/sample/reflection_u"),
    (sample(grain_size=1e-3), "give its inner_radius", "#/sample/grain_size"),
    (sample(short={"reflection": READ}), "short is of a cell", "#/sample/short"),
    ({"sample": []}, "1 to 200 samples", "#/sample"),
    ({"aperture": {"model": "fittd"}}, "did you mean fitted?", "#/aperture/model"),
    ({"aperture": {"model": "radiating"}}, "needs inner_radius", "#/aperture/inner_radius"),
    ({"aperture": {"inner_radius": 0.456, "outer_radius": 1.49}}, "in mm? send 0.000456",
     "#/aperture/inner_radius"),
    ({"aperture": {"inner_radius": 2e-3, "outer_radius": 1e-3}}, "below outer_radius",
     "#/aperture/inner_radius"),
    ({"aperture": {"inner_radius": 1e-3}}, "missing beside", "#/aperture/outer_radius"),
    ({"kind": "cell"}, "sample.short, sample.open", "#/sample"),
    ({"kind": "cell", "sample": {}}, "needs its sample_length", "#/line/sample_length"),
    ({"kind": "filled-line"}, "short, open, load as standards", "#/standards/1/name"),
    ({"kind": "filled-line", "standards": STANDARDS[:1]}, "open, load is missing", "#/standards"),
    ({"kind": "tipp"}, "expected 'tip'", "#/kind"),
    ({"kind": "filled-line", "standards": [], "line": {"air_gaps": {
        "inner_conductor": 1.0, "sample_inner": 0.5, "sample_outer": 2.0, "outer_conductor": 3.0}}},
     "must grow", "#/line/gap"),
    ({"units": {"frequency": "K"}}, "takes Hz", "#/units/frequency"),
    ({"reflection_u": -1.0}, "at least 0", "#/reflection_u"),
    ({"reflection_u": "0.001"}, "expected a number, or a list with one for each point",
     "#/reflection_u"),
]  # fmt: skip


@pytest.mark.parametrize(("changes", "sentence", "place"), CASES)
def test_a_request_about_reflections_says_how_to_mend_it(server, changes, sentence, place):
    text, places = refused(server.client.post("/v1/reflections", json=tip_request(**changes)))
    assert sentence in text
    assert place in places


LINE = {"sample_length": 0.03}
FILE = two_port_text("loam_30mm")
ONE = {"real": [0.1, 0.1, 0.1], "imaginary": [0.0, 0.0, 0.0]}
THREE = [1e9, 2e9, 3e9]


@pytest.mark.parametrize(
    ("request_", "sentence", "place"),
    [
        ({"sample": {"touchstone": FILE}}, "line is missing", "#/line"),
        ({"sample": {"touchstone": FILE}, "line": {"sample_length": 30}}, "in mm? send 0.03",
         "#/line/sample_length"),
        ({"sample": {"touchstone": FILE}, "line": {**LINE, "holder_length": 0.02}},
         "shorter than the sample", "#/line/holder_length"),
        ({"sample": {"touchstone": FILE}, "line": {**LINE, "air_before": 0.02}},
         "needs holder_length", "#/line/holder_length"),
        ({"sample": {"touchstone": FILE},
          "line": {**LINE, "holder_length": 0.05, "air_before": 0.04}}, "leave 0.02 m of air",
         "#/line/air_before"),
        ({"sample": {"touchstone": "[Version] 2.0\n# GHz S RI\n[Number of Ports] 2\n"
                     "[Reference] 50 0\n[Network Data]\n1 .1 0 .2 0 .2 0 .1 0\n[End]\n"},
          "line": LINE}, "in ohm above 0 after [Reference], found 0", "#/sample/touchstone"),
        ({"sample": {"touchstone": FILE, "s11": ONE}, "line": LINE}, "leave it out",
         "#/sample/s11"),
        ({"sample": {"touchstone": "# GHz S RI R 50\n1 .5 0\n"}, "line": LINE},
         "expected 9 numbers", "#/sample/touchstone"),
        ({"sample": {"s11": ONE}, "frequency": THREE, "line": LINE}, "s21 is missing",
         "#/sample/s21"),
        ({"sample": {"s11": ONE, "s21": ONE}, "line": LINE}, "frequency is missing",
         "#/sample/frequency"),
        ({"sample": {"s11": ONE, "s21": ONE}, "frequency": THREE[:2], "line": LINE},
         "has 3 values where frequency has 2", "#/sample/s11"),
        ({"sample": {"s11": ONE, "s21": ONE}, "frequency": THREE[::-1], "line": LINE},
         "must rise", "#/frequency"),
        ({"sample": {"s11": ONE, "s21": ONE}, "frequency": THREE,
          "line": {**LINE, "holder_length": 0.05}}, "give s22, or air_before", "#/sample/s22"),
        ({"sample": {"touchstone": FILE}, "line": LINE, "method": "guess"}, "least-squares",
         "#/method"),
    ],
)  # fmt: skip
def test_a_request_about_scattering_says_how_to_mend_it(server, request_, sentence, place):
    text, places = refused(server.client.post("/v1/scattering", json=request_))
    assert sentence in text
    assert place in places


@pytest.mark.parametrize("path", ["/v1/reflections", "/v1/scattering"])
def test_only_json_is_taken(server, path):
    answer = server.client.post(path, content=b"# GHz", headers={"Content-Type": "text/plain"})
    assert answer.status_code == 415
    assert "as touchstone" in answer.json()["detail"]
    answer = server.client.post(path, content=b"{", headers={"Content-Type": "application/json"})
    assert answer.status_code == 400
    assert server.client.post(path, json=[]).status_code == 422


def test_one_sweep_for_all_standards_is_refused(server):
    flat = {"reflection": columns(np.full(3, 0.5 + 0j))}
    standards = [{**{k: v for k, v in s.items() if k != "touchstone"}, **copy.deepcopy(flat)}
                 for s in STANDARDS]  # fmt: skip
    answer = server.client.post("/v1/reflections", json={
        "kind": "tip", "frequency": THREE, "sample": flat, "standards": standards,
    })  # fmt: skip
    assert answer.status_code == 422, answer.text
    (fault,) = answer.json()["errors"]
    assert fault["pointer"] == "#/standards/1"
    assert "was read exactly like" in fault["detail"]
