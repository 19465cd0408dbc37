"""Sums over the first axis, in its order, whatever the shape of the rest.

numpy adds up eight numbers at a time where the axis happens to be the fast one, which it is for a
single row: the last digit of a row would depend on whether it has company.
"""

import numpy as np

from models.relation import Array


def added(parts: Array) -> Array:
    """Sum over the first axis, shape of the rest; at least one part."""
    total = parts[0].copy()
    for part in parts[1:]:
        total += part
    return total


def dotted(one: Array, other: Array) -> Array:
    """Sum of products over the first axis, elementwise over the rest."""
    total = np.multiply(one[0], other[0])
    for left, right in zip(one[1:], other[1:], strict=True):
        total += left * right
    return total
