"""How OpenAPI describes POST /v1/calibrations."""

from typing import Any

from service.calibrations.bodies import CALIBRATIONS

JSON = "application/json"
NUMBER = {"type": ["number", "null"]}


def request_schema() -> dict[str, Any]:
    """JSON schema of the body, its parts in the components of the description."""
    schema = CALIBRATIONS.json_schema(ref_template="#/components/schemas/{model}")
    schema.pop("$defs", None)
    return schema


def _numbers(**about: str) -> dict[str, Any]:
    return {name: {**NUMBER, "description": text} for name, text in about.items()}


FIT = {
    "pairs": {"type": "integer"},
    "levels": {"type": ["integer", "null"]},
    "degrees_of_freedom": {"type": "integer"},
    "weights": {"type": "string", "enum": ["stated uncertainties", "all pairs alike"]},
    **_numbers(
        chi_square="weighted sum of squares with stated uncertainties alone, against "
        "degrees_of_freedom; null where none were stated, as the next two are",
        reduced_chi_square="over degrees_of_freedom",
        chi_square_probability="of one as large, were the stated uncertainties all there is",
        residual_standard_deviation="root of the sum of squared residuals over "
        "degrees_of_freedom, whatever the weights",
        soil_scatter="about the curve, beyond stated uncertainties: what brings chi_square down to "
        "degrees_of_freedom when it is added to every water content; without stated "
        "uncertainties residual_standard_deviation",
        leave_one_out_error="root mean square of the errors of prediction of pairs that were left "
        "out, each with all of its level",
        leave_one_out_bias="their mean",
    ),
    "left_out": {"type": "string", "enum": ["pair", "level"]},
    "largest_residual": {"type": "object", "description": "in its own standard deviations"},
}
BAND = _numbers(
    apparent_permittivity="of a new reading",
    apparent_permittivity_u="its standard uncertainty",
    water_content="of the curve",
    water_content_u="standard uncertainty of the water content of a new reading",
    water_content_lower="of the prediction band, which holds new readings; not cut at 0",
    water_content_upper="of the prediction band; not cut at the pores",
    mean_u="standard uncertainty of the curve",
    mean_lower="of the mean band, which holds the curve",
    mean_upper="of the mean band",
)
OBJECT = {"type": "object"}
OBJECTS = {"type": "array", "items": OBJECT}
ANSWER: dict[str, Any] = {
    "type": "object",
    "required": ["form", "coefficients", "covariance", "fit", "range", "mixing_model", "bands",
                 "pairs", "units", "coverage_probability", "advisories"],
    "properties": {
        "title": {"type": "string"},
        "form": OBJECT,
        "coefficients": {**OBJECT, "description": "as the mixing model calls them, each with _u; "
                         "m3/m3 in powers of permittivity or its root, whatever the units"},
        "covariance": {**OBJECT, "description": "of the coefficients, in the order of `of`; shared "
                       "errors and the scatter of the soil included"},
        "fit": {"type": "object", "properties": FIT},
        "range": {**OBJECT, "description": "least and largest of the pairs"},
        "mixing_model": {"type": ["object", "null"], "description": "to be sent as it is as "
                         "mixing_model to POST /v1/estimates or in a stored soil; null, with an "
                         "advisory that says why, where estimates would not take it"},
        "bands": {"type": "array", "items": {"type": "object", "properties": {
            **BAND, "extrapolated": {"type": "boolean"}}}},
        "pairs": {**OBJECTS, "description": "as they were used, volumetric, with residuals"},
        "forms": {**OBJECTS, "description": "where none was asked for: all that could be fitted"},
        "shared": {**OBJECT, "description": "errors that move all pairs at once, and by how much"},
        "units": {"type": "object", "additionalProperties": {"type": "string"}},
        "coverage_probability": {"type": "number"},
        "advisories": OBJECTS,
    },
}  # fmt: skip

DESCRIPTION: dict[str, Any] = {
    "requestBody": {
        "required": True,
        "description": "Pairs of permittivity and water content of one soil. With uncertainties "
        "the curve is fitted with errors in both variables (York and others, 2004), without any "
        "by least squares. An error that all pairs share (_u_shared; bulk_density_u of one "
        "density for all) goes into the covariance and the bands, and into no weight; leave out "
        "that of the permittivity where the same probe makes the new readings. A "
        "real_permittivity counts as the apparent one of the soil without loss.",
        "content": {JSON: {"schema": request_schema()}},
    },
    "responses": {
        "200": {
            "description": "The curve, how good it is, and its bands. Where uncertainties were "
            "stated, bands weigh whether they are right against chi-square; where none were, they "
            "are those of Student's distribution.",
            "content": {JSON: {"schema": ANSWER}},
        }
    },
}
