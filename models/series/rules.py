"""The rules by which readings become a mean or a sum; an answer names the one it used."""

from dataclasses import dataclass

from models.registry import Registry


@dataclass(frozen=True, slots=True, kw_only=True)
class Rule:
    """One way to reckon, by name: two of them give two numbers from the same readings."""

    key: str
    text: str


MEAN_RULES: Registry[Rule] = Registry(
    "mean rule",
    Rule(key="plain",
         text="The sum of the readings of the interval over their number, however they are spread "
         "over it."),
    Rule(key="time-weighted",
         text="Straight lines between neighbouring readings, cut at the ends of the interval, over "
         "the time they span. Neighbours further apart than the stated gap are not joined: that "
         "time counts for nothing, and an interval that no line reaches has no mean."),
)  # fmt: skip

STORAGE_RULES: Registry[Rule] = Registry(
    "storage rule",
    Rule(key="layer",
         text="Each sensor stands for the layer between the middles to its neighbours; the first "
         "layer starts at the surface, the last ends at the deepest sensor."),
    Rule(key="trapezoid",
         text="Straight lines between neighbouring sensors, the first sensor's value above it, "
         "nothing below the deepest sensor."),
)  # fmt: skip

COVERAGE_RULE = Rule(
    key="distinct-steps",
    text="Steps of the expected length that hold at least one number, over the whole steps that "
    "the interval has room for (at least one), at most 1. Steps are counted from the interval's "
    "first number, to the nearest: a logger that starts late or wavers is not a gap.",
)
