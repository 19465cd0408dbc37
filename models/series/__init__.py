"""Series: columns of times, values and uncertainties; means over time, sums over depth, gaps.

Times are seconds since the epoch; what a day is, is said by the edges that come in. Nothing here
depends on the order of the rows.
"""

from models.series.bounds import Bounds
from models.series.gaps import Gaps, find_gaps, usual_step
from models.series.latest import Latest, latest
from models.series.resampling import Bins, Mean, resample
from models.series.rules import COVERAGE_RULE, MEAN_RULES, STORAGE_RULES, Rule
from models.series.series import Series, series
from models.series.storage import Profile, Storage, layers_of, store_water

__all__ = [
    "COVERAGE_RULE",
    "MEAN_RULES",
    "STORAGE_RULES",
    "Bins",
    "Bounds",
    "Gaps",
    "Latest",
    "Mean",
    "Profile",
    "Rule",
    "Series",
    "Storage",
    "find_gaps",
    "latest",
    "layers_of",
    "resample",
    "series",
    "store_water",
    "usual_step",
]
