"""Requests about the simulated sweeps, and what is told of those that cannot be used."""

import copy

from tests.models.reflection.sweep_records import RECORDS, tip_text

STANDARDS = [
    {"name": "short", "touchstone": tip_text("short")},
    {"name": "air", "touchstone": tip_text("air")},
    {"name": "water", "temperature": 25.0, "touchstone": tip_text("water25")},
    {"name": "methanol", "temperature": 25.0, "touchstone": tip_text("methanol25")},
]


def tip_request(**changes):
    request = {"kind": "tip", "sample": {"touchstone": tip_text("loam")}, "standards": STANDARDS}
    return copy.deepcopy({**request, **changes})


def with_standard(place, **changes):
    standards = copy.deepcopy(STANDARDS)
    standards[place] = {n: v for n, v in {**standards[place], **changes}.items() if v is not None}
    return {"standards": standards}


def two_port_text(name):
    return (RECORDS / "two_port" / f"{name}.s2p").read_text("utf-8")


def columns(values):
    return {"real": values.real.tolist(), "imaginary": values.imag.tolist()}


def refused(answer):
    """Every sentence of a 422 and the places it names."""
    assert answer.status_code == 422, answer.text
    assert answer.headers["Content-Type"] == "application/problem+json"
    problem = answer.json()
    errors = problem.get("errors", [])
    return " ".join([problem["detail"], *(e["detail"] for e in errors)]), [
        e["pointer"] for e in errors
    ]
