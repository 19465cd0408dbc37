"""Scattering parameters that refer to one impedance at each port, referred to another one.

Kurokawa (1965): S' = A^-1 (S - G) (1 - G S)^-1 A with G = (z' - z) / (z' + z) and
A = sqrt(z' z) / (z' + z) on the diagonal, for real impedances z before and z' after.
"""

import numpy as np

from models.relation import Array, ComplexArray


@np.errstate(all="ignore")
def renormalised(
    parameters: ComplexArray, before: Array, after: float
) -> tuple[ComplexArray, Array]:
    """Parameters that refer to another impedance, and by how much their noise grows, shape (f,).

    parameters: shape (f, n, n). before: of each port, ohm, shape (n,). after: ohm, of all ports.

    Noise: the standard uncertainty of each part of each parameter in the root mean square, where
    all of them have the same before.
    """
    ports: ComplexArray = np.eye(parameters.shape[-1], dtype=np.complex128)
    mismatch: ComplexArray = ports * (after - before) / (after + before)
    scale: ComplexArray = ports * np.sqrt(after * before) / (after + before)
    inward = np.linalg.inv(ports - mismatch @ parameters)
    turned = (parameters - mismatch) @ inward
    left = np.linalg.inv(scale) @ (ports + turned @ mismatch)
    right = inward @ scale
    growth = _size(left) * _size(right) / parameters.shape[-1]
    return np.linalg.inv(scale) @ turned @ scale, growth


def _size(matrices: ComplexArray) -> Array:
    """Root of the sum of squares of each matrix."""
    return np.sqrt(np.square(np.abs(matrices)).sum(axis=(-2, -1)))
