"""What users of these curves commonly hold to, where the papers themselves are silent.

Common practice, from memory: no single publication stands behind these ends.
"""

TDR_FREQUENCY = (0.3e9, 1.5e9)
"""Hz, effective: slower signals lose the high frequencies to clay and salt."""

UNFROZEN = (0.0, 45.0)
"""Cel: laboratory curves see liquid water only; ice is missed."""

MINERAL_CLAY = (0.0, 0.35)
"""kg/kg: above, bound water lowers the permittivity by more than the curves' scatter."""

MINERAL_ORGANIC_MATTER = (0.0, 0.05)
"""kg/kg, of what counts as a mineral soil."""

ORGANIC_MATTER = (0.2, 1.0)
"""kg/kg, of what counts as an organic soil."""
