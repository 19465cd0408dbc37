"""Debye (1929), Cole and Cole (1941), Davidson and Cole (1951), Havriliak and Negami (1967).

One function holds all four: g = (1 + (j w tau)^(1 - alpha))^(-beta), with alpha = 0 or beta = 1
where a kind does not ask for them. A resonance, g = 1 / (1 + j w tau - (w / w0)^2), is what a
piece of line or a charge on a spring adds instead; without its inertia it is Debye's.
"""

from dataclasses import dataclass

import numpy as np

from models.registry import Registry
from models.relation import Array, Citation, ComplexArray, Relation


@dataclass(frozen=True, slots=True)
class Shape:
    """A dimensionless shape of a term, or its resonance frequency, and where it may lie."""

    name: str
    meaning: str
    low: float
    high: float
    logarithmic: bool = False


ALPHA = Shape("alpha", "how far relaxation times spread to both sides", 0.0, 0.9)
BETA = Shape("beta", "below 1: relaxation times reach further down than up", 0.1, 1.0)
RESONANCE_FREQUENCY = Shape(
    "resonance_frequency", "where the term resonates, Hz", 1e3, 1e12, logarithmic=True
)


@dataclass(frozen=True, slots=True, kw_only=True)
class RelaxationFunction(Relation):
    """One way in which polarisation follows the field.

    ``value`` is g(w), 1 at rest and 0 far above the relaxation: the term is strength times g.
    """

    shapes: tuple[Shape, ...] = ()


def _source(authors: str, year: int, title: str, where: str, doi: str) -> Citation:
    return Citation(authors=authors, year=year, title=title, where=where, doi=doi,
                    note="equation as in every textbook; citation from memory")  # fmt: skip


RELAXATIONS: Registry[RelaxationFunction] = Registry(
    "relaxation function",
    RelaxationFunction(
        key="debye",
        title="One relaxation time",
        equation="g = 1 / (1 + j w tau)",
        source=Citation(authors="Debye, P.", year=1929, title="Polar molecules",
                        where="Chemical Catalog Company, New York",
                        note="equation as in every textbook; citation from memory"),
    ),
    RelaxationFunction(
        key="cole-cole",
        title="Relaxation times spread evenly to both sides",
        equation="g = 1 / (1 + (j w tau)^(1 - alpha))",
        shapes=(ALPHA,),
        source=_source("Cole, K. S.; Cole, R. H.", 1941,
                       "Dispersion and absorption in dielectrics I. Alternating current "
                       "characteristics", "Journal of Chemical Physics 9(4), 341-351",
                       "10.1063/1.1750906"),
    ),
    RelaxationFunction(
        key="cole-davidson",
        title="Relaxation times that end at a longest one",
        equation="g = 1 / (1 + j w tau)^beta",
        shapes=(BETA,),
        source=_source("Davidson, D. W.; Cole, R. H.", 1951,
                       "Dielectric relaxation in glycerol, propylene glycol, and n-propanol",
                       "Journal of Chemical Physics 19(12), 1484-1490", "10.1063/1.1748105"),
    ),
    RelaxationFunction(
        key="havriliak-negami",
        title="Relaxation times spread unevenly",
        equation="g = 1 / (1 + (j w tau)^(1 - alpha))^beta",
        shapes=(ALPHA, BETA),
        source=_source("Havriliak, S.; Negami, S.", 1967, "A complex plane representation of "
                       "dielectric and mechanical relaxation processes in some polymers",
                       "Polymer 8, 161-210", "10.1016/0032-3861(67)90021-3"),
    ),
    RelaxationFunction(
        key="resonance",
        title="A damped resonance",
        equation="g = 1 / (1 + j w tau - (w / w0)^2)",
        shapes=(RESONANCE_FREQUENCY,),
        source=Citation(authors="Lorentz, H. A.", year=1916, title="The theory of electrons",
                        where="2nd edition, Teubner, Leipzig",
                        note="equation as in every textbook; citation from memory"),
    ),
)  # fmt: skip


@np.errstate(all="ignore")
def dispersion(
    kind: str, angular_frequency: Array, log_time: float, shape: tuple[float, ...] = ()
) -> tuple[ComplexArray, ComplexArray]:
    """The function g of a kind, and its derivatives by ln tau and by each of its shapes.

    angular_frequency: shape (n,), rad/s. log_time: ln of the relaxation time in s.
    shape: values of the kind's shapes, in their order; of a logarithmic one the logarithm.
    Returns shapes (n,) and (1 + shapes, n).
    """
    if kind == "resonance":
        return _resonance(angular_frequency, log_time, shape[0])
    alpha = shape[0] if ALPHA in RELAXATIONS[kind].shapes else 0.0
    beta = shape[-1] if BETA in RELAXATIONS[kind].shapes else 1.0
    log_x = np.log(angular_frequency) + log_time + 0.5j * np.pi
    z = np.exp((1 - alpha) * log_x)
    log_u = np.log1p(z)
    g = np.exp(-beta * log_u)
    fall = -beta * g * z / (1 + z)
    slopes = {"time": fall * (1 - alpha), "alpha": -fall * log_x, "beta": -g * log_u}
    wanted = ("time", *(shape.name for shape in RELAXATIONS[kind].shapes))
    return g, np.array([slopes[name] for name in wanted])


def _resonance(
    angular_frequency: Array, log_time: float, log_frequency: float
) -> tuple[ComplexArray, ComplexArray]:
    damping = 1j * angular_frequency * np.exp(log_time)
    inertia = np.square(angular_frequency / (2 * np.pi * np.exp(log_frequency)))
    g = 1 / (1 + damping - inertia)
    return g, np.array([-g * g * damping, -2 * g * g * inertia])
