"""A tip's admittance straight from ratios of reflections: what a bilinear port leaves unchanged.

Four reflections through any one port keep their cross-ratio, so that three known admittances give
a fourth without the port, C0 or the reference impedance being known. Marsland and Evans (1987).
"""

import numpy as np

from models.relation import ComplexArray


@np.errstate(all="ignore")
def from_short(
    read: ComplexArray,
    short: ComplexArray,
    standards: tuple[ComplexArray, ComplexArray],
    known: tuple[ComplexArray, ComplexArray],
) -> ComplexArray:
    """Relative admittance from a short and two standards, elementwise.

    read, short, standards: reflections as read. known: relative admittances of the standards.
    """
    (a, w), (y_a, y_w) = standards, known
    return y_a + (y_w - y_a) * (read - a) * (w - short) / ((read - short) * (w - a))


@np.errstate(all="ignore")
def from_three(
    read: ComplexArray,
    standards: tuple[ComplexArray, ComplexArray, ComplexArray],
    known: tuple[ComplexArray, ComplexArray, ComplexArray],
) -> ComplexArray:
    """Relative admittance from three standards of finite admittance, elementwise."""
    (r1, r2, r3), (y1, y2, y3) = standards, known
    ratio = (read - r1) * (r2 - r3) / ((read - r2) * (r3 - r1)) * (y3 - y1) / (y2 - y3)
    return (y1 - ratio * y2) / (1 - ratio)


@np.errstate(all="ignore")
def radiation(
    read: ComplexArray,
    short: ComplexArray,
    standards: tuple[ComplexArray, ComplexArray],
    known: tuple[ComplexArray, ComplexArray, ComplexArray],
) -> ComplexArray:
    """Coefficient g of eps + g eps^2.5 from a short, two standards and a fourth, elementwise.

    read: reflection of the fourth standard. known: permittivities of the two and of the fourth.

    Point by point it is as noisy as the fourth reflection: below 0.3 GHz there is nothing to see.
    """
    (a, w), (e_a, e_w, e_4) = standards, known
    ratio = (read - a) * (w - short) / ((read - short) * (w - a))
    left = e_4 - e_a - ratio * (e_w - e_a)
    return left / (ratio * (e_w**2.5 - e_a**2.5) - (e_4**2.5 - e_a**2.5))
