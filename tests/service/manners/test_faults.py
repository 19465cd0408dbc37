"""What is wrong with a request is said where it is, in words that mend it."""

from typing import Annotated, Literal

import pytest
from pydantic import BaseModel, ConfigDict, Field, TypeAdapter, ValidationError

from service.faults import LONGEST, Fault, pointer, problems_of, shown

Number = Annotated[float, Field(strict=True, allow_inf_nan=False)]


class Strict(BaseModel):
    model_config = ConfigDict(extra="forbid")


class Soil(Strict):
    clay: Annotated[Number, Field(ge=0, le=1)] | None = None
    texture: Literal["loam", "sand"] | None = None


class Reading(Strict):
    permittivity: Number
    temperature: Number | None = None


class Columns(Strict):
    permittivity: list[Number]


class Model(Strict):
    name: str


class Asked(Strict):
    soil: Soil = Soil()
    model: str | Model = "crim"
    readings: Annotated[list[Reading], Field(max_length=3)] | Columns


ASKED = TypeAdapter(Asked)


def faults(document):
    with pytest.raises(ValidationError) as caught:
        ASKED.validate_python(document)
    return problems_of(caught.value, document, ASKED)


@pytest.mark.parametrize(
    ("value", "found"),
    [(True, "true"), (False, "false"), (None, "null"), ("1.5", '"1.5"'), ([], "a list"),
     ({"a": 1}, "an object")],
)  # fmt: skip
def test_a_number_must_be_a_number(value, found):
    expected = Fault(f"expected a number, found {found}", "#/readings/0/permittivity")
    assert faults({"readings": [{"permittivity": value}]}) == [expected]


@pytest.mark.parametrize(
    ("value", "found"),
    [(float("nan"), "NaN"), (float("inf"), "Infinity"), (float("-inf"), "-Infinity")],
)
def test_a_number_must_be_finite(value, found):
    expected = Fault(f"expected a finite number, found {found}", "#/readings/permittivity/1")
    assert faults({"readings": {"permittivity": [1.0, value]}}) == [expected]


def test_a_number_of_400_digits_is_refused_without_repeating_it():
    (fault,) = faults({"readings": [{"permittivity": 10**400}]})
    assert fault.pointer == "#/readings/0/permittivity"
    assert len(fault.detail) < 2 * LONGEST


def test_a_misspelt_key_is_answered_with_the_one_that_was_meant():
    found = faults({"sol": {}, "readings": [{"permitivity": 3.0, "permittivity": 3.0}]})
    assert Fault('unknown key "sol"; did you mean soil?', "#/sol") in found
    assert Fault('unknown key "permitivity"; did you mean permittivity?',
                 "#/readings/0/permitivity") in found  # fmt: skip


def test_only_keys_of_the_same_place_are_suggested():
    (fault,) = faults({"readings": [], "soil": {"permittivity": 3.0}})
    assert fault.detail == 'unknown key "permittivity"; known are clay, texture'


def test_a_misspelt_choice_is_answered_with_the_one_that_was_meant():
    (fault,) = faults({"readings": [], "soil": {"texture": "laom"}})
    assert fault.detail == "expected 'loam' or 'sand', found \"laom\"; did you mean loam?"


def test_a_value_out_of_range_names_the_range():
    (fault,) = faults({"readings": [], "soil": {"clay": 22}})
    assert fault == Fault("expected a number of at most 1.0, found 22", "#/soil/clay")


def test_what_is_missing_is_named():
    assert faults({"readings": [{}]}) == [
        Fault("permittivity is missing", "#/readings/0/permittivity")
    ]
    assert faults({}) == [Fault("readings is missing", "#/readings")]


def test_pointers_hold_no_names_of_alternatives():
    for fault in faults({"readings": 3, "model": {"nam": "crim"}}):
        assert fault.pointer in {"#/readings", "#/model/nam", "#/model/name"}


def test_a_list_that_is_too_long_is_not_said_to_be_no_object():
    (fault,) = faults({"readings": [{"permittivity": 3.0}] * 4})
    assert fault == Fault("expected at most 3 items, found 4", "#/readings")


def test_a_whole_document_of_the_wrong_kind():
    assert faults([1, 2]) == [Fault("expected an object, found a list", "#")]


def test_slashes_in_keys_are_escaped():
    assert pointer(["a/b", "c~d", 0]) == "#/a~1b/c~0d/0"


@pytest.mark.parametrize(
    "value", ["x" * 10_000, "\ud800" * 5, 10**10_000, b"\xff" * 1000],
    ids=["long", "surrogates", "digits", "bytes"],
)  # fmt: skip
def test_a_value_is_shown_short_and_in_utf_8(value):
    text = shown(value)
    assert len(text) <= LONGEST + 2
    text.encode()


def test_many_faults_do_not_repeat_the_request():
    found = faults({"readings": {"permittivity": ["x" * 1000] * 1000}})
    assert len(found) == 1000
    assert all(len(fault.detail) < 3 * LONGEST for fault in found)
