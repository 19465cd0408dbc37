"""Estimates: readings in, values with uncertainty out; the only place where the two meet."""

from models.estimate.basis import Basis, Query, narrowed, prepare
from models.estimate.beside.explanation import explain
from models.estimate.choice import choose
from models.estimate.pipeline import Estimates, columns_of, estimate
from models.estimate.salt.salinity import SalinityQuery
from models.remarks import Remarks

__all__ = [
    "Basis",
    "Estimates",
    "Query",
    "Remarks",
    "SalinityQuery",
    "choose",
    "columns_of",
    "estimate",
    "explain",
    "narrowed",
    "prepare",
]
