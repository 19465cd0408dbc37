"""Skewed relaxations as ladders of single relaxation times, from their exact distributions.

Of a Davidson-Cole term the times lie below tau, and tau' / tau is distributed as Beta(beta, 1 -
beta); Gauss-Jacobi points of that weight converge fastest. A Havriliak-Negami term has a smooth
distribution of ln tau', for which equal steps converge as fast.
"""

import numpy as np
from scipy.special import roots_sh_jacobi

from models.relation import Array

RUNGS = 24
"""Of a Davidson-Cole ladder."""
LEAST_ALPHA = 1e-3
"""Below this the distribution is as good as that of Davidson and Cole."""
STEP = 0.7
"""Of ln tau', in units of pi alpha / (1 - alpha), the width of the narrowest peak."""
TAIL = 1e-5
"""Share of the peak below which times are left out."""
MOST_RUNGS = 400


def rungs(alpha: float, beta: float) -> tuple[Array, Array]:
    """Shares of the strength and times over tau, of Debye terms that add up to the relaxation.

    alpha, beta: of Havriliak and Negami; alpha = 0 is Davidson and Cole.
    """
    if beta >= 1.0 - 1e-9 and alpha < LEAST_ALPHA:
        return np.ones(1), np.ones(1)
    if alpha < LEAST_ALPHA:
        with np.errstate(all="ignore"):  # a recurrence that is 0 / 0 at its first step
            times, weights = roots_sh_jacobi(RUNGS, 0.0, beta)
        return weights / np.sum(weights), np.asarray(times)
    slope = 1 - alpha
    step = min(STEP * np.pi * alpha / slope, 1.0)
    down, up = -np.log(TAIL) / (slope * beta), -np.log(TAIL) / slope
    step = max(step, (down + up) / MOST_RUNGS)
    logs = np.arange(-np.ceil(down / step), np.ceil(up / step) + 1) * step
    density = distribution(logs, alpha, beta)
    kept = density > TAIL * density.max()
    shares = density[kept] / np.sum(density[kept])
    return shares, np.exp(logs[kept])


def distribution(log_ratio: Array, alpha: float, beta: float) -> Array:
    """Density of ln(tau' / tau) of a Havriliak-Negami relaxation, 0 < alpha < 1; its integral is 1.

    Havriliak and Negami (1967), their distribution of relaxation times, from memory.
    """
    a = 1 - alpha
    y = np.exp(a * log_ratio)
    angle = np.arctan2(np.sin(np.pi * a), y + np.cos(np.pi * a))
    size = y * y + 2 * y * np.cos(np.pi * a) + 1
    density: Array = y**beta * np.sin(beta * angle) / (np.pi * size ** (beta / 2))
    return density
