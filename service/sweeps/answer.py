"""What POST /v1/reflections and POST /v1/scattering answer."""

from collections.abc import Mapping, Sequence
from typing import Any

import numpy as np

from models.advisories import Advice, advise
from models.conversion import Units, from_si
from models.reflection.estimates import Band, SweepEstimate, coverage_factor
from models.reflection.line.estimate import LineEstimate
from models.reflection.sweep_flags import SWEEP_FLAGS, Finding, keys_of
from models.reflection.tip.consistency import Departure, closest
from models.reflection.tip.estimate import TipEstimate
from models.reflection.tip.layers import sensing_depth
from models.reflection.two_port.estimate import TwoPortEstimate
from models.relation import Array, ComplexArray
from service.sweeps.bodies import Common, ReflectionsBody, ScatteringBody

CONVENTION = "exp(+j w t), eps = eps' - j eps''"


def tip_answer(
    body: ReflectionsBody, found: TipEstimate, said: Sequence[Advice] = ()
) -> dict[str, Any]:
    """Permittivity spectra, the aperture, and how the standards agree.

    said: what there is to say of how the request was sent.
    """
    calibration, misfit = found.calibration, found.misfit
    one, other, apart = closest(calibration)
    aperture: dict[str, Any] = {"model": calibration.aperture.model}
    geometry = calibration.aperture.geometry
    if geometry is not None:
        aperture |= {"inner_radius": geometry.inner, "outer_radius": geometry.outer,
                     "fill_permittivity": geometry.fill,
                     "capacitance": geometry.capacitance,
                     "sensing_depth": sensing_depth(geometry)}  # fmt: skip
    if calibration.aperture.model == "fitted":
        fitted = zip("hg", calibration.aperture.fitted, calibration.fitted_u, strict=True)
        for name, value, width in fitted:
            aperture |= {name: value, f"{name}_u": float(width)}
    source = "stated" if misfit.stated else "residuals" if misfit.value == misfit.value else None
    return {
        "kind": body.kind,
        **_spectra(body, found.estimate),
        "aperture": aperture,
        "standards": [_standard(d) for d in found.departures]
        or [{"name": s.name} for s in calibration.standards],
        "closest_standards": {"names": [one, other], "difference": _number(apart)},
        "noise": _noise(misfit.noise, source or ("repeats" if misfit.known else None)),
        **_rest(body, found.estimate, (*said, *tip_advice(found))),
    }


def tip_advice(found: TipEstimate) -> tuple[Advice, ...]:
    """What three standards leave open, and whether the uncertainty holds it."""
    if len(found.calibration.standards) > 3:
        return ()
    share = "; what another model would say is in the uncertainty" if found.aperture_open else ""
    return (advise("aperture-not-told", model=found.calibration.aperture.model, share=share),)


def line_answer(
    body: ReflectionsBody, found: LineEstimate, said: Sequence[Advice] = ()
) -> dict[str, Any]:
    """The permittivity spectrum of a filled line or a cell; said: as of ``tip_answer``."""
    stated = "stated or scatter" if found.noise_known else None
    return {
        "kind": body.kind,
        **_spectra(body, found.estimate),
        "noise": _noise(found.noise, stated),
        **_rest(body, found.estimate, said),
    }


def two_port_advice(found: TwoPortEstimate, own: float) -> tuple[Advice, ...]:
    """Whether another length would explain a permeability; own: that of the sample, m."""
    length = found.length_if_not_magnetic
    if length is None:
        return ()
    return (advise("sample-length-suspected", length=f"{length:.4g}", own=f"{own:.4g}"),)


def two_port_answer(
    body: ScatteringBody, found: TwoPortEstimate, said: Sequence[Advice] = ()
) -> dict[str, Any]:
    """The spectrum of permittivity and, where it is not 1, permeability.

    said: as of ``tip_answer``.
    """
    source = "stated" if body.reflection_u or body.sample.reflection_u else "symmetry"
    return {
        "method": found.method,
        **_sample(body, found.estimate, 0),
        "position": {"air_before": found.planes[0], "air_behind": found.planes[1],
                     "air_before_u": _number(found.position_u)},
        "whole_wavelengths": found.turns,
        "noise": _noise(found.noise, source if found.noise_known else None),
        **_rest(body, found.estimate, (*said, *two_port_advice(found, body.line.sample_length))),
    }  # fmt: skip


def spectrum_of(
    estimate: SweepEstimate, place: int, probability: float, units: Units
) -> dict[str, Any]:
    """The columns of one sample, over frequency."""
    factor = coverage_factor(probability, estimate.degrees_of_freedom[place])
    columns: dict[str, Any] = {"frequency": from_si("frequency", estimate.frequency, units)}
    columns |= _banded("permittivity", estimate.permittivity[place], estimate.band, place, factor)
    if estimate.permeability is not None and estimate.permeability_band is not None:
        columns |= _banded(
            "permeability", estimate.permeability[place], estimate.permeability_band, place, factor
        )
    columns["flags"] = [list(keys_of(int(mask))) for mask in estimate.flags[place]]
    return columns


def _banded(
    name: str, values: ComplexArray, band: Band, place: int, factor: Array
) -> dict[str, Array]:
    """A value +- k u, unclipped: a loss that cannot be told from 0 may be below it."""
    columns: dict[str, Array] = {}
    parts = (("real", values.real, band.real, band.real_shared),
             ("imaginary", -values.imag, band.loss, band.loss_shared))  # fmt: skip
    nothing = np.isnan(values)
    for part, value, u, shared in parts:
        key = f"{part}_{name}"
        width = np.where(nothing, np.nan, u[place])
        columns |= {
            key: value + 0.0,
            f"{key}_u": width,
            f"{key}_u_shared": np.where(nothing, np.nan, shared[place]),
            f"{key}_lower": value - factor * width,
            f"{key}_upper": value + factor * width,
        }
    return columns


def _spectra(body: ReflectionsBody, estimate: SweepEstimate) -> dict[str, Any]:
    if not isinstance(body.sample, list):
        return _sample(body, estimate, 0)
    return {
        "samples": [
            {"name": sample.name, **_sample(body, estimate, n)}
            for n, sample in enumerate(body.sample)
        ]
    }


def _sample(body: Common, estimate: SweepEstimate, place: int) -> dict[str, Any]:
    return {
        "spectrum": spectrum_of(estimate, place, body.coverage_probability, body.units),
        "checks": [_check(finding, body.units) for finding in estimate.findings[place]],
    }


def _check(finding: Finding, units: Units) -> dict[str, Any]:
    told: dict[str, Any] = {
        "code": finding.key,
        "holds": None if np.isnan(finding.value) else finding.holds,
        "about": finding.about,
        "value": _number(finding.value),
        "limit": _number(finding.limit),
        "unit": finding.unit,
    }
    if not finding.holds:
        told["text"] = SWEEP_FLAGS[finding.key].text
    if finding.frequencies is not None:
        told["frequencies"] = from_si("frequency", np.array(finding.frequencies), units)
    return told


def _standard(departure: Departure) -> dict[str, Any]:
    return {
        "name": departure.name,
        "departure": _number(departure.size),
        "departure_u": _number(departure.size_u),
        "looks_like": departure.looks_like,
        "chi_square_without": _number(departure.chi_square),
    }


def _noise(level: float, source: str | None) -> dict[str, Any]:
    known = source is not None
    return {"reflection_u": _number(level) if known else None, "source": source or "not known"}


def _rest(body: Common, estimate: SweepEstimate, more: Sequence[Advice] = ()) -> dict[str, Any]:
    said = [advise("indirect-measurement"), *more]
    if not estimate.noise_known:
        said.append(advise("no-uncertainty-stated", names="reflection", example="reflection_u"))
    units = {"frequency": body.units.get("frequency", "Hz"), **_permittivities(estimate)}
    return {
        "convention": CONVENTION,
        "conjugated": estimate.conjugated,
        "coverage_probability": body.coverage_probability,
        "units": units,
        "advisories": _advisories(said, estimate),
    }


def _permittivities(estimate: SweepEstimate) -> Mapping[str, str]:
    names = ["real_permittivity", "imaginary_permittivity"]
    if estimate.permeability is not None:
        names += ["real_permeability", "imaginary_permeability"]
    return dict.fromkeys(names, "1")


def _advisories(said: Sequence[Advice], estimate: SweepEstimate) -> list[dict[str, str]]:
    told = [{"code": one.code, "text": one.text} for one in said]
    if estimate.conjugated:
        told.append({"code": "conjugated", "text": SWEEP_FLAGS["conjugated"].text})
    return told


def _number(value: float | None) -> float | None:
    """None where it is no number."""
    return None if value is None or not np.isfinite(value) else float(value)
