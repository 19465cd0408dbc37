"""Levels that are not those of reflection coefficients: volts, counts, or another scale."""

from collections.abc import Iterator

import numpy as np

from models.reflection.tdr.agreement import Begins, late_end
from models.reflection.tdr.bench import Bench, Description

BEFORE = 0.15
"""By how much the level before the first reflection may differ from that of the cable: 100 m of a
thin one are 0.10 off."""
AIR = (0.75, 1.1)
"""Levels at which a trace of an open line ends; 40 m of thin cable are at 0.75."""
SETTLED_AIR = (0.9, 1.1)
"""The same of a long record: what an instrument's scale may be off, which air corrects."""


def level_before(probe: Description) -> float:
    """Reflection of the cable on its instrument: the level of a trace before anything else."""
    cable, instrument = probe.cable.impedance, probe.instrument_impedance
    return (cable - instrument) / (cable + instrument)


def doubts(bench: Bench, begins: Begins) -> Iterator[str]:
    """Sentences about levels no such line has, each with what was found and expected."""
    air = bench.calibration.air
    if air is not None:
        level = late_end(air.settled)
        low, high = AIR if air.late is None else SETTLED_AIR
        if not low <= level <= high:
            yield f"the trace in air ends at {level:+.3g}, where an open line ends near +1"
    expected = level_before(bench.probe)
    levels = begins.level if bench.begin is None else np.append(begins.level, bench.begin.level)
    off = levels[np.abs(levels - expected) > BEFORE]
    if off.size:
        yield (
            f"{off.size} traces lie at {float(np.median(off)):+.3g} before their first reflection, "
            f"where a cable of {bench.probe.cable.impedance:g} Ohm on an instrument of "
            f"{bench.probe.instrument_impedance:g} Ohm lies at {expected:+.3g}"
        )
