"""POST /v1/spectra over HTTP: units, forms of a spectrum, mistakes, charts, circuits."""

from xml.etree import ElementTree

import numpy as np
import pytest
from scipy.constants import epsilon_0

F = np.geomspace(1e7, 6e9, 30)
EPS = 8 + 6.5 / (1 + (2j * np.pi * F * 1.2e-9) ** 0.7) - 0.03j / (2 * np.pi * F * epsilon_0)
COLE_COLE = {"terms": ["cole-cole"]}


def parts(values, names=("real", "imaginary")):
    return dict(zip(names, (values.real.tolist(), values.imag.tolist()), strict=True))


def request(eps=EPS, **change):
    spectrum = {
        "frequency": F.tolist(),
        "real_permittivity": eps.real.tolist(),
        "imaginary_permittivity": (-eps.imag).tolist(),
    }
    return {"spectrum": spectrum, "model": COLE_COLE, **change}


def post(server, body, **headers):
    return server.client.post("/v1/spectra", json=body, headers=headers)


def relaxation_time(answer):
    assert answer.status_code == 200, answer.text
    return answer.json()["fit"]["terms"][0]["relaxation_time"]


def test_terms_come_in_the_units_of_the_api(server):
    fit = post(server, request()).json()["fit"]
    assert fit["terms"][0]["relaxation_time"] == pytest.approx(1.2)
    assert fit["bulk_conductivity"] == pytest.approx(0.3)
    assert fit["static_permittivity"] == pytest.approx(14.5)


def test_other_units_are_taken_and_answered(server):
    body = request(units={"frequency": "MHz", "relaxation_time": "ps", "bulk_conductivity": "mS/m"})
    body["spectrum"]["frequency"] = (F / 1e6).tolist()
    answer = post(server, body).json()
    assert answer["fit"]["terms"][0]["relaxation_time"] == pytest.approx(1200)
    assert answer["fit"]["bulk_conductivity"] == pytest.approx(30)
    assert answer["curve"]["frequency"] == pytest.approx((F / 1e6).tolist())
    assert answer["units"]["relaxation_time"] == "ps"


CELL = 2e-12
ADMITTANCE = 2j * np.pi * F * CELL * EPS
ANGLES = {"magnitude": np.abs(EPS).tolist(), "degrees": np.degrees(np.angle(EPS)).tolist()}
FORMS = {
    "complex": {"permittivity": parts(EPS)},
    "magnitude and degrees": {"permittivity": ANGLES},
    "modulus": {"modulus": parts(1 / EPS)},
    "admittance": {"admittance": parts(ADMITTANCE)},
    "impedance": {"impedance": parts(1 / ADMITTANCE)},
}


@pytest.mark.parametrize("form", FORMS.values(), ids=FORMS)
def test_a_spectrum_may_come_in_any_view(server, form):
    body = {"spectrum": {"frequency": F.tolist(), **form}, "model": COLE_COLE,
            "cell": {"capacitance": CELL}}  # fmt: skip
    answer = post(server, body)
    assert relaxation_time(answer) == pytest.approx(1.2)
    assert answer.json()["flags"] == []


def test_the_other_time_convention_is_turned_once_and_said(server):
    answer = post(server, request(eps=np.conj(EPS)))
    assert relaxation_time(answer) == pytest.approx(1.2)
    assert answer.json()["flags"] == ["conjugated"]


def test_views_are_data(server):
    body = request(views=["impedance", "modulus"], cell={"capacitance": CELL})
    views = post(server, body).json()["views"]
    assert list(views) == ["impedance", "modulus"]
    for part, values in parts(1 / ADMITTANCE).items():
        assert views["impedance"]["measured"][part] == pytest.approx(values)
        assert views["impedance"]["fitted"][part] == pytest.approx(values, rel=1e-5)


def test_a_stated_noise_gives_a_reduced_chi_square(server):
    body = request()
    body["spectrum"] |= {"relative_u": 0.01}
    fit = post(server, body).json()["fit"]
    assert fit["noise"]["stated"]
    assert fit["reduced_chi_square"] < 1e-6
    matrix = np.array(fit["covariance"]["matrix"])
    assert matrix.shape == (5, 5)
    assert np.allclose(matrix, matrix.T)
    tau = fit["covariance"]["parameters"].index("ln relaxation_time_1")
    relative = fit["terms"][0]["relaxation_time_u"] / fit["terms"][0]["relaxation_time"]
    assert np.sqrt(matrix[tau, tau]) == pytest.approx(relative)


WRONG = {
    "lengths": ({"real_permittivity": [1.0]}, {}, "#/spectrum/real_permittivity", "has 1 values"),
    "order": ({"frequency": [*F[:0:-1].tolist(), 1e12]}, {}, "#/spectrum/frequency",
              "rise or fall"),
    "unit": ({"frequency": (F / 1e6).tolist()}, {}, "#/spectrum/frequency", '"frequency": "MHz"'),
    "null": ({"real_permittivity": [None] * 30}, {}, "#/spectrum/real_permittivity/0", "number"),
    "key": ({"frequenzy": []}, {}, "#/spectrum/frequenzy", "did you mean frequency"),
    "two forms": ({"modulus": parts(1 / EPS)}, {}, "#/spectrum", "found real_permittivity"),
    "pair": ({"real_permittivity": None, "imaginary_permittivity": None,
              "permittivity": {"real": [1.0], "degrees": [2.0]}}, {},
             "#/spectrum/permittivity", "magnitude and degrees"),
    "no cell": ({"real_permittivity": None, "imaginary_permittivity": None,
                 "impedance": parts(1 / ADMITTANCE)}, {}, "#/cell", "capacitance"),
    "term": ({}, {"model": {"terms": ["cole-kole"]}}, "#/model/terms/0", "did you mean cole-cole"),
    "too many terms": ({}, {"model": {"terms": ["debye"] * 5}}, "#/model/terms", "at most 4"),
    "mixing model": ({}, {"mixing_model": "topp-1980"}, "#/mixing_model", "whole band"),
    "no porosity": ({}, {"soil": {"clay": 0.2}, "temperature": 20.0}, "#/soil/porosity",
                    "soil.texture"),
    "kelvin": ({}, {"soil": {"porosity": 0.4}, "temperature": 293.0}, "#/temperature",
               "looks like K"),
    "percent": ({}, {"soil": {"porosity": 45.0}, "temperature": 20.0}, "#/soil/porosity", "%"),
    "both": ({}, {"circuit": {"parallel": {"capacitance": 1e-12, "resistance": 1.0}}},
             "#/circuit", "found both"),
}  # fmt: skip


@pytest.mark.parametrize(("spectrum", "rest", "place", "words"), WRONG.values(), ids=WRONG)
def test_a_mistake_is_named_where_it_stands(server, spectrum, rest, place, words):
    body = request(**rest)
    merged = {**body["spectrum"], **spectrum}
    body["spectrum"] = {name: value for name, value in merged.items() if value is not None}
    answer = post(server, body)
    assert answer.status_code == 422, answer.text
    faults = {fault["pointer"]: fault["detail"] for fault in answer.json()["errors"]}
    assert place in faults
    assert words in faults[place]


def test_too_few_points_for_the_terms_are_refused(server):
    body = request(model={"terms": ["havriliak-negami", "cole-cole"]})
    body["spectrum"] = {name: values[:4] for name, values in body["spectrum"].items()}
    answer = post(server, body)
    assert answer.status_code == 422
    assert "needs at least 5 frequencies, found 4" in answer.text


@pytest.mark.parametrize("plane", ["frequency", "complex"])
@pytest.mark.parametrize("view", ["permittivity", "modulus", "impedance", "admittance"])
def test_a_chart_is_well_formed_and_says_what_its_axes_are(server, view, plane):
    body = request(chart={"view": view, "plane": plane}, cell={"capacitance": CELL})
    answer = post(server, body, Accept="image/svg+xml")
    assert answer.headers["Content-Type"] == "image/svg+xml"
    assert answer.headers["Vary"] == "Accept"
    drawing = ElementTree.fromstring(answer.text)  # noqa: S314 - our own
    words = [text.text for text in drawing.iter("{http://www.w3.org/2000/svg}text")]
    unit = {"impedance": " in Ohm", "admittance": " in S"}.get(view, "")
    assert any(word.startswith(view.capitalize()) and word.endswith(unit) for word in words)
    assert ("Frequency in MHz" in words) == (plane == "frequency")
    assert {"measured", "fitted"} <= set(words)
    dashes = {line.get("stroke-dasharray") for line in drawing.iter()} - {None}
    assert dashes


def test_a_soil_is_told_with_its_residuals(server):
    water = 5.22 + (80.21 - 5.22) / (1 + 2j * np.pi * F * 9.36e-12)
    salty = water - 0.05j / (2 * np.pi * F * epsilon_0)
    eps = (0.55 * np.sqrt(4.7) + 0.25 + 0.2 * np.sqrt(salty)) ** 2
    body = request(eps=eps, soil={"porosity": 0.45, "solid_permittivity": 4.7}, temperature=20.0)
    answer = post(server, body | {"model": {}}).json()
    soil = answer["soil"]
    assert soil["water_content"] == pytest.approx(0.2, abs=0.002)
    assert soil["water_content_lower"] < 0.2 < soil["water_content_upper"]
    assert soil["pore_water_conductivity"] == pytest.approx(0.5 * 1.11, rel=0.03)
    assert {"relative_residual", "covariance", "alternatives"} <= set(soil)
    codes = {said["code"] for said in answer["advisories"]}
    assert {"indirect-measurement", "numbers-not-verdicts"} <= codes


def test_without_a_temperature_there_is_no_water_content(server):
    answer = post(server, request(soil={"porosity": 0.45})).json()
    assert "soil" not in answer
    assert "missing:temperature" in answer["flags"]


def test_a_circuit_tells_its_material_and_back(server):
    body = request(eps=6 + 20 / (1 + 2j * np.pi * F * 1e-9) - 0.05j / (2 * np.pi * F * epsilon_0))
    body["model"], body["cell"] = {"terms": ["debye"]}, {"capacitance": CELL}
    circuit = post(server, body).json()["circuit"]
    for sent in (
        {"two_units": circuit["two_units"]},
        {
            "parallel": circuit["parallel"],
            "branches": [{n: v for n, v in circuit["branches"][0].items() if n != "of"}],
        },
    ):
        asked = {"circuit": {"cell_capacitance": CELL, **sent}, "frequency": F.tolist()}
        answer = post(server, asked).json()
        (term,) = answer["material"]["terms"]
        assert answer["material"]["infinite_permittivity"] == pytest.approx(6, rel=1e-6)
        assert answer["material"]["bulk_conductivity"] == pytest.approx(0.5, rel=1e-6)
        assert term["relaxation_time"] == pytest.approx(1, rel=1e-6)
        again = answer["spectrum"]["real_permittivity"]
        assert again == pytest.approx(body["spectrum"]["real_permittivity"], rel=1e-6)


def test_a_geometry_tells_both_materials(server):
    a, b = (e - 1j * s / (2 * np.pi * F * epsilon_0) for e, s in ((5, 1e-3), (80, 0.2)))
    eps = 0.1 * a + 0.3 * b + 0.6 / (0.7 / a + 0.3 / b)
    body = request(eps=eps, geometry={"first": 0.1, "second": 0.3, "split": 0.7})
    pairs = post(server, body | {"model": {"terms": ["debye"]}}).json()["circuit"]["materials"]
    found = [[one[key] for one in pair for key in ("permittivity", "bulk_conductivity")]
             for pair in pairs]  # fmt: skip
    assert any(np.allclose(one, [5, 0.01, 80, 2.0], rtol=1e-4) for one in found)


def test_a_spectrum_is_the_raw_record_of_a_reading(server):
    body = {"mixing_model": "crim", "soil": {"porosity": 0.45, "solid_permittivity": 4.7},
            "raw_records": {"spectrum": {"at_frequency": 5e8, "model": COLE_COLE}},
            "readings": [{"spectrum": request()["spectrum"], "temperature": 20.0},
                         {"real_permittivity": 12.0, "temperature": 20.0}]}  # fmt: skip
    answer = server.client.post("/v1/estimates", json=body)
    assert answer.status_code == 200, answer.text
    first, second = answer.json()["estimates"]
    here = 8 + 6.5 / (1 + (2j * np.pi * 5e8 * 1.2e-9) ** 0.7)
    assert first["real_permittivity"] == pytest.approx(here.real, rel=1e-5)
    assert first["bulk_conductivity"] == pytest.approx(0.3, rel=1e-4)
    assert first["water_content"] is not None
    assert second["real_permittivity"] == 12.0


def test_a_raw_spectrum_that_is_none_is_refused_at_its_place(server):
    spectrum = request()["spectrum"]
    spectrum["frequency"][7] = spectrum["frequency"][3]
    readings = [{"real_permittivity": 12.0}, {"spectrum": spectrum}]
    body = {"mixing_model": "crim", "soil": {"porosity": 0.45}, "readings": readings}
    answer = server.client.post("/v1/estimates", json=body)
    assert answer.status_code == 422
    assert answer.json()["errors"][0]["pointer"] == "#/readings/1/spectrum/frequency"


FLAT = {"frequency": [1e7, 1e8, 1e9, 2e9], "real_permittivity": [5.0] * 4,
        "imaginary_permittivity": [0.0] * 4}  # fmt: skip


def test_rounding_does_not_fill_the_chart_of_a_flat_spectrum(server):
    answer = post(server, {"spectrum": FLAT}, Accept="image/svg+xml")
    assert answer.status_code == 200, answer.text
    drawing = ElementTree.fromstring(answer.text)  # noqa: S314 - our own
    texts = list(drawing.iter("{http://www.w3.org/2000/svg}text"))
    ticks = [one.text for one in texts if one.get("text-anchor") == "end"]
    assert len(ticks) >= 6
    assert len(set(ticks)) == len(ticks)
    # a digit is about 7 pixels wide at this size, and the labels have 70 pixels
    assert max(map(len, ticks)) <= 10
    assert all(abs(float(tick)) < 1e-3 or abs(float(tick) - 5) < 1e-3 for tick in ticks)


def test_a_flag_is_one_advisory_however_many_things_it_is_about(server):
    answer = post(server, {"spectrum": FLAT, "model": {"terms": ["debye", "cole-cole"]}}).json()
    codes = [said["code"] for said in answer["advisories"]]
    assert "term-not-resolved" in codes
    assert len(codes) == len(set(codes))
    (told,) = [s["text"] for s in answer["advisories"] if s["code"] == "term-not-resolved"]
    assert "Term 1 (debye)" in told
    assert "Term 2 (cole-cole)" in told


def test_phases_in_radians_are_asked_about(server):
    radians = {"magnitude": np.abs(EPS).tolist(), "degrees": np.angle(EPS).tolist()}
    codes = {}
    for name, form in (("radians", radians), ("degrees", ANGLES)):
        body = request(spectrum={"frequency": F.tolist(), "permittivity": form})
        answer = post(server, body)
        assert answer.status_code == 200, answer.text
        codes[name] = {one["code"] for one in answer.json()["advisories"]}
        reading = {"temperature": 20, "spectrum": body["spectrum"]}
        settings = {"raw_records": {"spectrum": {"at_frequency": 5e8}}}
        whole = {"mixing_model": "topp-1980", "readings": [reading], **settings}
        raw = server.client.post("/v1/estimates", json=whole).json()
        codes[f"{name} of a reading"] = {one["code"] for one in raw["advisories"]}
    assert "phase-unit-suspected" in codes["radians"] & codes["radians of a reading"]
    assert "phase-unit-suspected" not in codes["degrees"] | codes["degrees of a reading"]


def test_a_spectrum_below_that_of_vacuum_is_refused(server):
    answer = post(server, request(eps=np.full(F.size, 0.5 - 0.01j)))
    assert answer.status_code == 422
    assert "which is at least 1" in answer.text


def test_a_row_made_of_a_spectrum_that_no_form_describes_is_flagged(server):
    """Points in pairs, as of a smoothed spectrum: what the form leaves over is no noise."""
    wave = 1 + 0.1 * np.sin(np.arange(F.size) / 3)
    told = {}
    for name, eps in (("right", EPS), ("wavy", EPS * wave)):
        reading = {"temperature": 20, "spectrum": request(eps=eps)["spectrum"]}
        settings = {"spectrum": {"at_frequency": 5e8, "model": COLE_COLE}}
        body = {"mixing_model": "topp-1980", "readings": [reading], "raw_records": settings}
        answer = server.client.post("/v1/estimates", json=body)
        assert answer.status_code == 200, answer.text
        told[name] = answer.json()["estimates"][0]["flags"]
    assert "raw-record-flagged" in told["wavy"]
    assert "raw-record-flagged" not in told["right"]
