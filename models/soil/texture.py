"""USDA texture classes and what they stand for when a soil is known by its class alone.

Fractions are class means; silt closes to one. Bulk densities and clay contents are the usual
handbook means, from memory; the porosities of Rawls, Brakensiek and Saxton (1982) agree with
1 - rho_b/rho_s to 0.02. A class is a default, never a field value: each uncertainty says so.
"""

from dataclasses import dataclass

from models.registry import Registry
from models.relation import Citation

SOURCE = Citation(
    authors="Rawls, W. J.; Brakensiek, D. L.; Saxton, K. E.",
    year=1982,
    title="Estimation of soil water properties",
    where="Transactions of the ASAE 25(5), 1316-1320",
    note="porosities from memory; fractions and bulk densities are handbook means, from memory",
)


@dataclass(frozen=True, slots=True, kw_only=True)
class TextureClass:
    """Means of one class, and how far a soil of that class may be from them (k = 1)."""

    key: str
    title: str
    sand: float | None
    clay: float | None
    bulk_density: float
    """kg/m3."""
    sand_u: float = 0.08
    clay_u: float = 0.04
    bulk_density_u: float = 100.0
    organic_matter: float | None = None
    organic_matter_u: float = 0.0
    particle_density: float = 2650.0
    particle_density_u: float = 50.0
    source: Citation = SOURCE


TEXTURES: Registry[TextureClass] = Registry(
    "soil texture",
    TextureClass(key="sand", title="sand", sand=0.92, clay=0.03, bulk_density=1500.0,
                 sand_u=0.04, clay_u=0.02),
    TextureClass(key="loamy-sand", title="loamy sand", sand=0.82, clay=0.06, bulk_density=1500.0,
                 sand_u=0.04, clay_u=0.03),
    TextureClass(key="sandy-loam", title="sandy loam", sand=0.58, clay=0.10, bulk_density=1450.0),
    TextureClass(key="loam", title="loam", sand=0.42, clay=0.20, bulk_density=1420.0),
    TextureClass(key="silt-loam", title="silt loam", sand=0.17, clay=0.15, bulk_density=1350.0),
    TextureClass(key="silt", title="silt", sand=0.07, clay=0.06, bulk_density=1350.0,
                 sand_u=0.04, clay_u=0.03),
    TextureClass(key="sandy-clay-loam", title="sandy clay loam", sand=0.58, clay=0.27,
                 bulk_density=1600.0),
    TextureClass(key="clay-loam", title="clay loam", sand=0.32, clay=0.34, bulk_density=1420.0),
    TextureClass(key="silty-clay-loam", title="silty clay loam", sand=0.10, clay=0.34,
                 bulk_density=1400.0, sand_u=0.05),
    TextureClass(key="sandy-clay", title="sandy clay", sand=0.52, clay=0.42, bulk_density=1500.0),
    TextureClass(key="silty-clay", title="silty clay", sand=0.06, clay=0.47, bulk_density=1380.0,
                 sand_u=0.04, clay_u=0.05),
    TextureClass(key="clay", title="clay", sand=0.22, clay=0.58, bulk_density=1390.0,
                 sand_u=0.10, clay_u=0.10),
    TextureClass(key="peat", title="peat", sand=None, clay=None, bulk_density=200.0,
                 bulk_density_u=80.0, organic_matter=0.80, organic_matter_u=0.15,
                 particle_density=1500.0, particle_density_u=100.0),
)  # fmt: skip


def texture_key(name: str) -> str:
    """The key of a class however its words are joined: "Sandy Loam" is sandy-loam."""
    return "-".join(name.strip().lower().replace("_", " ").replace("-", " ").split())
