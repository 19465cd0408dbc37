"""A permittivity spectrum as it came: checked, in one time convention, with what is known of it."""

from dataclasses import dataclass

import numpy as np

from models.errors import Complaint, ParameterError
from models.relation import Array, ComplexArray

LEAST_POINTS = 3
LEAST_LOSS = 0.01
"""Share of |eps| below which a relative noise does not follow a part down."""
SMALLEST, LARGEST = 0.8, 1e9
"""Of a permittivity; below vacuum calibration is off, above no cell measures anything."""
SLOWEST, FASTEST, NEVER_BELOW = 1.0, 1e13, 1e5
"""Hz; a sweep that ends below the last is in MHz or GHz."""


@dataclass(frozen=True, slots=True)
class Spectrum:
    """Permittivity eps' - j eps'' over frequency; shape (n,) each."""

    frequency: Array
    """Hz."""
    permittivity: ComplexArray
    real_u: Array | None = None
    """Standard uncertainty of eps'; None: not stated."""
    loss_u: Array | None = None
    conjugated: bool = False
    """It came written for exp(-j w t), and was turned round once."""

    @property
    def noise_stated(self) -> bool:
        """Whether the caller said how uncertain the points are."""
        return self.real_u is not None and self.loss_u is not None

    def thinned(self, most: int) -> "Spectrum":
        """At most that many points, evenly spread over the points there are."""
        count = len(self.frequency)
        if count <= most:
            return self
        kept = np.unique(np.linspace(0, count - 1, most).round().astype(int))
        return Spectrum(
            self.frequency[kept], self.permittivity[kept],
            None if self.real_u is None else self.real_u[kept],
            None if self.loss_u is None else self.loss_u[kept], self.conjugated,
        )  # fmt: skip

    def within(self, low: float, high: float) -> "Spectrum":
        """The points between two frequencies, Hz."""
        kept = (self.frequency >= low) & (self.frequency <= high)
        return Spectrum(
            self.frequency[kept], self.permittivity[kept],
            None if self.real_u is None else self.real_u[kept],
            None if self.loss_u is None else self.loss_u[kept], self.conjugated,
        )  # fmt: skip


def spectrum_of(
    frequency: Array,
    real: Array,
    loss: Array,
    real_u: Array | None = None,
    loss_u: Array | None = None,
) -> Spectrum:
    """A checked spectrum with its loss above zero.

    frequency: Hz, shape (n,), rising or falling all along. real, loss: eps' and eps'', shape (n,).
    real_u, loss_u: their standard uncertainties, shape (n,) or one for all points.
    Raises ParameterError that names what does not fit and how to mend it.

    Where most of the loss is below zero, the spectrum was written for exp(-j w t) and is
    conjugated, once and as a whole; single points below zero are noise and stay.
    """
    columns = {"frequency": frequency, "real_permittivity": real, "imaginary_permittivity": loss}
    complaints = [*_length_complaints(columns, real_u, loss_u)]
    if not complaints:
        complaints = [*_axis_complaints(frequency), *_value_complaints(columns, real_u, loss_u)]
    if complaints:
        raise ParameterError("spectrum", complaints)
    turned = bool(np.median(loss) < 0)
    return Spectrum(
        frequency, real - 1j * (-loss if turned else loss),
        None if real_u is None else np.broadcast_to(real_u, real.shape),
        None if loss_u is None else np.broadcast_to(loss_u, loss.shape), turned,
    )  # fmt: skip


def _complaint(name: str, detail: str) -> Complaint:
    return Complaint(name, detail, ("spectrum", name))


def _length_complaints(
    columns: dict[str, Array], real_u: Array | None, loss_u: Array | None
) -> list[Complaint]:
    count = len(columns["frequency"])
    widths = {"real_permittivity_u": real_u, "imaginary_permittivity_u": loss_u}
    lists = {name: u for name, u in widths.items() if u is not None and np.ndim(u)}
    found = {**columns, **lists}
    complaints = [
        _complaint(name, f"{name} has {len(given)} values where frequency has {count}")
        for name, given in found.items()
        if len(given) != count
    ]
    if not complaints and count < LEAST_POINTS:
        detail = f"expected at least {LEAST_POINTS} frequencies, found {count}"
        complaints.append(_complaint("frequency", detail))
    if (real_u is None) != (loss_u is None):
        lacking = "real_permittivity_u" if real_u is None else "imaginary_permittivity_u"
        complaints.append(_complaint(lacking, f"{lacking} is missing: state both parts or none"))
    return complaints


def _axis_complaints(frequency: Array) -> list[Complaint]:
    if not np.all(np.isfinite(frequency)):
        return [_complaint("frequency", "frequency holds what is not a finite number")]
    steps = np.diff(frequency)
    direction = 1.0 if frequency[-1] >= frequency[0] else -1.0
    wrong = np.flatnonzero(steps * direction <= 0)
    if wrong.size:
        at = int(wrong[0]) + 1
        detail = (
            f"frequency must rise or fall all along: place {at} holds {frequency[at]:g} after "
            f"{frequency[at - 1]:g} (counted from 0); sort the spectrum and merge repeats"
        )
        return [_complaint("frequency", detail)]
    low, high = float(np.min(frequency)), float(np.max(frequency))
    if low <= 0:
        return [_complaint("frequency", f"frequency must be above 0 Hz, found {low:g}")]
    if high < NEVER_BELOW:
        unit = "GHz" if high < 120 else "MHz"
        detail = (
            f"frequency ends at {high:g} Hz: that looks like {unit}; send Hz, or name the unit: "
            f'"units": {{"frequency": "{unit}"}}'
        )
        return [_complaint("frequency", detail)]
    if low < SLOWEST or high > FASTEST:
        detail = f"expected frequency from {SLOWEST:g} to {FASTEST:g} Hz, found {low:g} to {high:g}"
        return [_complaint("frequency", detail)]
    return []


def _value_complaints(
    columns: dict[str, Array], real_u: Array | None, loss_u: Array | None
) -> list[Complaint]:
    complaints = [
        _complaint(name, f"{name} holds what is not a finite number")
        for name, given in columns.items()
        if name != "frequency" and not np.all(np.isfinite(given))
    ]
    complaints += [
        _complaint(name, f"expected {name} of at most {LARGEST:g}, found {worst:g}")
        for name, given in columns.items()
        if name != "frequency" and (worst := float(np.max(np.abs(given)))) > LARGEST
    ]
    middle = float(np.median(columns["real_permittivity"]))
    if not middle > SMALLEST:
        detail = (
            f"real_permittivity is {middle:g} in the middle; expected eps' of "
            "eps = eps' - j eps'', which is at least 1"
        )
        complaints.append(_complaint("real_permittivity", detail))
    for name, given in (("real_permittivity_u", real_u), ("imaginary_permittivity_u", loss_u)):
        if given is not None and not np.all((np.asarray(given) > 0) & np.isfinite(given)):
            detail = f"{name} must be above 0 everywhere; leave it out where it is not known"
            complaints.append(_complaint(name, detail))
    return complaints
