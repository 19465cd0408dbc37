"""What an answer tells of the soil behind a spectrum."""

from typing import Any

import numpy as np

from models.conversion import Units, from_si
from models.relation import Array
from models.spectrum.interpretation import SoilAnswer
from models.spectrum.water.inversion import Band

UNITLESS = ("free_water_content", "bound_water_content", "interface_alpha")


def soil_echo(answer: SoilAnswer, units: Units) -> dict[str, Any]:
    """Water content and its companions, residual figures, covariance, and the other variants."""
    band = answer.bands[0]
    told: dict[str, Any] = {}
    for one in answer.told:
        ends = {"": one.value, "_u": one.standard_uncertainty, "_u_shared": one.shared,
                "_lower": one.lower, "_upper": one.upper}  # fmt: skip
        for suffix, value in ends.items():
            name = one.name + suffix
            told[name] = float(from_si(name, value, units))
    return {
        **told,
        "mixing_model": {"name": band.scene.model, **band.scene.parameters},
        "processes": _processes(band, units),
        "reduced_chi_square": band.reduced_chi_square if band.noise_stated else None,
        "degrees_of_freedom": band.degrees_of_freedom,
        "relative_residual": band.relative_residual,
        "residual": _residual(band),
        "covariance": {
            "parameters": [name.replace("ln_", "ln ") for name in band.variant.names],
            "unit": "SI; of natural logarithms where a name begins with ln",
            "matrix": band.covariance.tolist(),
        },
        "alternatives": [
            {"processes": other.variant.title, "aicc_difference": other.aicc - band.aicc,
             "water_content": other.water_content, "relative_residual": other.relative_residual}
            for other in answer.bands[1:]
        ],
    }  # fmt: skip


def _processes(band: Band, units: Units) -> dict[str, Any]:
    """What the soil was found to do in this band."""
    told: dict[str, Any] = {
        "in_words": band.variant.title,
        "free_water_content": float(
            from_si("water_content", band.value("free_water_content"), units)
        ),
        "conduction": "beside the mixture" if band.variant.beside else "through the free water",
    }
    for process, present in (("bound", band.variant.bound), ("interface", band.variant.interface)):
        if present:
            time = float(np.exp(band.value(f"ln_{process}_relaxation_time")))
            told[f"{process}_relaxation_time"] = float(from_si("relaxation_time", time, units))
    if band.variant.interface:
        told["interface_strength"] = float(np.exp(band.value("ln_interface_strength")))
        told["interface_alpha"] = band.value("interface_alpha")
    return told


def _residual(band: Band) -> dict[str, Any]:
    """Measured minus fitted, and what they come to by part and by decade."""
    off = band.spectrum.permittivity - band.fitted[0]
    size = np.abs(band.fitted[0])
    return {
        "frequency": band.spectrum.frequency,
        "real": np.ascontiguousarray(off.real),
        "imaginary": np.ascontiguousarray(off.imag),
        "relative_real": _rms(off.real / size),
        "relative_imaginary": _rms(off.imag / size),
    }


def _rms(values: Array) -> float:
    return float(np.sqrt(np.mean(np.square(values))))
