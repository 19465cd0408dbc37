"""GET /v1/<catalogue> and /v1/<catalogue>/{name}: what the science knows, and who says so."""

import json
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import Annotated, Any

from fastapi import APIRouter, Path, Request, Response

from models.advisories import ADVISORIES
from models.calibration.advisories import CALIBRATION_ADVISORIES
from models.conductivity import TEMPERATURE_COMPENSATIONS
from models.decisions.advisories import DECISION_ADVISORIES
from models.decisions.crops import CROPS
from models.decisions.flags import DECISION_FLAGS
from models.decisions.terms import WORDS
from models.flags import FLAGS
from models.mixing import MIXING_MODELS
from models.reflection.sweep_flags import SWEEP_FLAGS
from models.salinity import PORE_WATER_MODELS
from models.soil import TEXTURES
from models.spectrum.flags import SPECTRUM_FLAGS
from models.water import WATER_MODELS
from service.errors import NotFound
from service.faults import hint, shortened
from service.negotiate import VARY, choose
from service.routes.etag import tagged
from service.schemas.catalogue import entry_of

MANNERS = (
    "Ranges and defaults are in the unit that stands beside them; errors and uncertainties of "
    "water content in m3/m3, k = 1. Strong `ETag`; `If-None-Match` is answered with 304."
)
OFFERED: Mapping[str, str] = {"json": "application/json"}


@dataclass(frozen=True, slots=True)
class Catalogue:
    """The members of one registry, or of several; then each tells its ``kind``."""

    path: str
    what: str
    registries: tuple[Mapping[str, Any], ...] = field(repr=False)

    @property
    def noun(self) -> str:
        """The key of the list in an answer, and the end of the operations' names."""
        return self.path.replace("-", "_")

    def entries(self) -> list[dict[str, Any]]:
        """Every entry, in the order of declaration."""
        members = [member for registry in self.registries for member in registry.values()]
        if len(self.registries) == 1:
            return [entry_of(member) for member in members]
        return [{**entry_of(member), "kind": type(member).__name__.lower()} for member in members]


CATALOGUES = (
    Catalogue("mixing-models", "Dielectric mixing models", (MIXING_MODELS,)),
    Catalogue("pore-water-models", "Pore-water conductivity from bulk conductivity",
              (PORE_WATER_MODELS,)),
    Catalogue("water-models", "Models of the permittivity of water", (WATER_MODELS,)),
    Catalogue("temperature-compensations", "Temperature compensations of conductivity",
              (TEMPERATURE_COMPENSATIONS,)),
    Catalogue("soil-textures", "Texture classes and what they stand for", (TEXTURES,)),
    Catalogue("crops", "Crops: root depth, depletion fraction, salt threshold and slope",
              (CROPS,)),
    Catalogue("flags", "Flags of rows and advisories of answers",
              (FLAGS, SWEEP_FLAGS, SPECTRUM_FLAGS, DECISION_FLAGS, ADVISORIES,
               CALIBRATION_ADVISORIES, DECISION_ADVISORIES)),
    Catalogue("quantities", "The vocabulary: names, units, gates", (WORDS,)),
)  # fmt: skip


def router_of(catalogue: Catalogue) -> APIRouter:
    """The two routes of a catalogue."""
    entries = catalogue.entries()
    whole = _bytes({catalogue.noun: entries})
    single = {entry["name"]: _bytes(entry) for entry in reversed(entries)}  # a flag before advice
    first = entries[0]
    router = APIRouter(prefix=f"/v1/{catalogue.path}", tags=["catalogues"])

    async def list_all(request: Request) -> Response:
        return _answer(request, whole)

    async def show_one(request: Request, name: Name) -> Response:
        known = name if name in single else name.partition(":")[0]  # missing:temperature
        if known not in single or (known != name and catalogue.path != "flags"):
            raise NotFound(f"/v1/{catalogue.path} has no {shortened(name)}{hint(name, single)}")
        return _answer(request, single[known])

    def add(path: str, route: Callable[..., Any], prefix: str, summary: str, example: Any) -> None:
        content = {OFFERED["json"]: {"schema": {"type": "object"}, "example": example}}
        router.add_api_route(
            path,
            route,
            name=f"{prefix}_{catalogue.noun}",
            summary=summary,
            description=MANNERS,
            responses={200: {"content": content}},
            response_class=Response,
        )

    add("", list_all, "list", catalogue.what, {catalogue.noun: [first]})
    add("/{name}", show_one, "show", f"{catalogue.what}: one entry", first)
    return router


Name = Annotated[str, Path(description="name of an entry, as the whole catalogue lists it")]


def _bytes(document: Any) -> bytes:
    return json.dumps(document, ensure_ascii=False, allow_nan=False).encode()


def _answer(request: Request, body: bytes) -> Response:
    accept = ", ".join(request.headers.getlist("accept"))
    media_type = choose(accept, request.query_params.get("format"), OFFERED)
    return tagged(request, body, media_type, VARY)


routers = tuple(router_of(catalogue) for catalogue in CATALOGUES)
