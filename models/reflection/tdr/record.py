"""A TDR record: reflection coefficients on an even axis of two-way time, many traces at once."""

from dataclasses import dataclass, replace

import numpy as np
from numpy.typing import ArrayLike, NDArray
from scipy.constants import speed_of_light

from models.errors import Complaint, ParameterError
from models.relation import Array, column

EVEN = 1e-3
"""Share of a step by which an axis that is given point by point may be uneven."""
LARGEST = 1.5
"""A passive line reflects at most everything; ringing and noise add a little."""
FINEST, COARSEST = 1e-13, 1e-7
"""s between points: what samplers resolve, and the long record of a long cable."""
LATEST = 2e-5
"""s: nothing comes back from a cable after that."""
FEWEST = 16
"""Points, below which a trace holds no reflections to be told apart."""


@dataclass(frozen=True, slots=True, eq=False)
class Traces:
    """Reflection coefficients of traces that share their axis."""

    start: float
    """s, two-way time of the first point."""
    step: float
    """s, between points."""
    rho: Array
    """Shape (traces, points); reflected over incident step: -1 short, 0 matched, 1 open."""
    noise: Array | None = None
    """Shape (traces,): standard uncertainty of one point; NaN or None where it is not known."""

    @property
    def count(self) -> int:
        """How many traces."""
        return int(self.rho.shape[0])

    @property
    def points(self) -> int:
        """How many points a trace has."""
        return int(self.rho.shape[1])

    @property
    def time(self) -> Array:
        """Two-way time of the points, s."""
        return column(self.start + self.step * np.arange(self.points))

    @property
    def end(self) -> float:
        """Two-way time of the last point, s."""
        return self.start + self.step * (self.points - 1)

    def rows(self, which: NDArray[np.intp]) -> "Traces":
        """Some of the traces."""
        noise = None if self.noise is None else self.noise[which]
        return replace(self, rho=self.rho[which], noise=noise)

    @property
    def stated_noise(self) -> Array:
        """Shape (traces,); NaN where it is not known."""
        return np.full(self.count, np.nan) if self.noise is None else self.noise


def traces(start: float, step: float, rho: ArrayLike, noise: ArrayLike | None = None) -> Traces:
    """Traces from what an instrument gives.

    rho: shape (points,) or (traces, points). noise: one number, or one per trace.
    Raises ParameterError when there are too few points, they are no reflection coefficients, or
    no instrument has such an axis.
    """
    values = np.atleast_2d(column(rho))
    name = "reflection_coefficient"
    if values.shape[1] < FEWEST:
        detail = f"expected at least {FEWEST} points, found {values.shape[1]}"
        raise ParameterError("trace", [Complaint(name, detail, (name,))])
    if not np.isfinite(values).all():
        place = int(np.argmin(np.isfinite(values).all(axis=0)))
        detail = f"point {place} is not a finite number: a trace has no gaps"
        raise ParameterError("trace", [Complaint(name, detail, (name, str(place)))])
    worst = float(np.max(np.abs(values)))
    if worst > LARGEST:
        detail = (
            f"expected reflection coefficients from -1 to 1, found {worst:.4g}: send ohm, volt or "
            "counts as level, with level_matched and level_open"
        )
        raise ParameterError("trace", [Complaint(name, detail, (name,))])
    end = start + step * (values.shape[1] - 1)
    if not (FINEST <= step <= COARSEST and abs(start) <= LATEST and end <= LATEST):
        detail = (
            f"expected points {1e12 * FINEST:g} to {1e12 * COARSEST:g} ps of two-way time apart, "
            f"the last at most {1e6 * LATEST:g} us after the step; found {1e12 * step:.4g} ps, the "
            f"last at {1e6 * end:.4g} us"
        )
        raise ParameterError("trace", [Complaint("axis", detail, ("axis",))])
    given = None if noise is None else np.broadcast_to(column(noise), values.shape[:1]).copy()
    return Traces(float(start), float(step), values, given)


def from_distance(
    distance: ArrayLike, velocity_factor: float = 1.0, name: str = "distance"
) -> tuple[float, float]:
    """Start and step in two-way time of an axis of one-way distances.

    distance: shape (points,), m, as the instrument shows them with its propagation velocity set to
    ``velocity_factor`` times that of light.
    Raises ParameterError unless it goes up in even steps.
    """
    return even_axis(2.0 * column(distance) / (speed_of_light * velocity_factor), name)


def even_axis(time: ArrayLike, name: str) -> tuple[float, float]:
    """Start and step of an axis that is given point by point.

    Raises ParameterError unless it goes up in even steps.
    """
    axis = column(time)
    steps = np.diff(axis)
    if axis.size < 2 or not np.all(steps > 0):
        place = int(np.argmin(steps > 0)) + 1 if axis.size > 1 else 0
        detail = f"expected {name} to go up from point to point; point {place} does not"
        raise ParameterError("trace", [Complaint(name, detail, (name,))])
    step = float(axis[-1] - axis[0]) / (axis.size - 1)
    uneven = float(np.max(np.abs(axis - axis[0] - step * np.arange(axis.size)))) / step
    if uneven > max(EVEN * axis.size, 0.1):
        detail = f"expected {name} in even steps; resample the trace on an even axis first"
        raise ParameterError("trace", [Complaint(name, detail, (name,))])
    return float(axis[0]), step


def window_axis(
    start: float, window: float, points: int, velocity_factor: float = 1.0
) -> tuple[float, float]:
    """Start and step in two-way time of a window of one-way distances.

    start: m, of the first point. window: m, from the first to the last of ``points``, which lie
    window / (points - 1) apart. velocity_factor: set on the instrument; 1: apparent lengths.
    """
    scale = 2.0 / (speed_of_light * velocity_factor)
    return scale * start, scale * window / (points - 1)
