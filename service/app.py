"""Assemble the application: routes, errors, layers, what happens at start and stop."""

import asyncio
import signal
import threading
from collections.abc import AsyncIterator, Callable, Iterator
from contextlib import AbstractAsyncContextManager, asynccontextmanager, contextmanager
from types import FrameType

from fastapi import FastAPI
from starlette.types import ASGIApp

from models.uncertainty.draws import POINTS
from service import __version__
from service.access import LimitRate, RequireKey, keys_of
from service.answers.together import Together
from service.batch.workers import spare_what_is_loaded, yield_to_requests
from service.errors import add_error_handlers
from service.formats.arrow import load_ahead
from service.formats.arrow.loading import load_beside
from service.limits import LimitBody
from service.metrics import COMMITS, count
from service.observe import Observe, write_access_log
from service.routes import (
    catalogues,
    estimates,
    health,
    pages,
    problems,
    reflections,
    scattering,
    spectra,
    waveforms,
)
from service.routes.calibrations import router as calibrations
from service.routes.decisions import routers as decisions
from service.routes.direct import Direct
from service.routes.stored import documents, overview, readings
from service.routes.stored import estimates as stored_estimates
from service.schemas.openapi import Api, operation_id
from service.settings import Settings, read_settings
from service.stations.documents import Shelf
from service.store.opening import open_store
from service.store.writer import Writer

DESCRIPTION = """
Readings of dielectric soil probes in, volumetric water content with its band out.

Names and meanings do not change within /v1; new keys may appear, so read past those you do not
know. A changed coefficient is a new model name or a new `revision`. Every 4xx and 5xx answer is
`application/problem+json`. HEAD is taken wherever GET is; `X-Request-Id` is echoed, or made.
"""
TAGS = [
    {"name": "stations", "description": "What is installed where; readings kept; what they say."},
    {"name": "estimates", "description": "Readings to water content."},
    {"name": "records", "description": "Raw records to permittivity, and to what it tells."},
    {"name": "calibrations", "description": "A soil's own mixing model from measured pairs."},
    {"name": "decisions", "description": "What is done with an estimate: numbers, no verdicts."},
    {"name": "catalogues", "description": "Models, textures, flags and words, with their sources."},
    {"name": "service", "description": "Health, versions, limits, problems."},
]

WARMING: tuple[Callable[[FastAPI], object], ...] = (
    lambda api: api.openapi(),
    lambda _: yield_to_requests(),
    lambda _: spare_what_is_loaded(),
    lambda _: load_ahead(),
    lambda _: load_beside(POINTS),
)
"""Called before the first request, so that no request waits for them."""


def create_app(settings: Settings | None = None) -> ASGIApp:
    """The service as it is served; settings from the environment unless given.

    Raises SettingsError when it may not start as set.
    """
    settings = settings or read_settings()
    return surrounded(create_api(settings), settings)


def create_api(settings: Settings) -> Api:
    """Routes and error answers, without the layers around them."""
    api = Api(
        title="Gleyline",
        summary="Soil water content and its band from dielectric probe readings",
        description=DESCRIPTION,
        version=__version__,
        openapi_tags=TAGS,
        docs_url=None,
        redoc_url=None,
        redirect_slashes=False,
        generate_unique_id_function=operation_id,
        lifespan=_lifespan,
    )
    api.state.settings = settings
    api.state.draining = False
    api.state.tables = 0
    api.state.together = Together()
    main = (estimates.router, spectra.router, waveforms.router, reflections.router,
            scattering.router, health.router, problems.router, pages.router)  # fmt: skip
    kept = (readings.router, stored_estimates.router, overview.router, *documents.routers)
    for router in (*main, calibrations, *decisions, *kept, *catalogues.routers):
        api.include_router(router)
    add_error_handlers(api)
    return api


def surrounded(api: Api, settings: Settings) -> ASGIApp:
    """The layers of every request, outermost last to be added."""
    keys = keys_of(settings)
    limited = LimitRate(LimitBody(Direct(api, api), settings), settings.requests_per_minute)
    guarded = RequireKey(limited, keys, on_loopback=settings.on_loopback)
    return Observe(guarded, (write_access_log, count))


def _lifespan(api: FastAPI) -> AbstractAsyncContextManager[None]:
    @asynccontextmanager
    async def life() -> AsyncIterator[None]:
        for warm in WARMING:
            warm(api)
        with _kept(api), _drained(api):
            yield

    return life()


@contextmanager
def _kept(api: FastAPI) -> Iterator[None]:
    """The store, open; at the end what was acknowledged or waits is written before it closes."""
    store = open_store(api.state.settings)
    store.on_commit = COMMITS.inc
    writer = Writer(store)
    api.state.writer, api.state.shelf = writer, Shelf(store)
    try:
        yield
    finally:
        writer.close()
        store.close()


@contextmanager
def _drained(api: FastAPI) -> Iterator[None]:
    """Between the stop signal and the server's own stop, let /readyz tell it for a while.

    The server stops listening as soon as it hears the signal; whoever balances the load would
    find out by failing requests. A second signal stops at once, whatever is under way.
    """
    seconds = api.state.settings.drain_seconds
    stop = signal.getsignal(signal.SIGTERM)
    if not callable(stop) or threading.current_thread() != threading.main_thread():
        yield
        return
    loop = asyncio.get_running_loop()

    def drain(number: int, frame: FrameType | None) -> None:
        if api.state.draining:
            stop(number, frame)
            stop(signal.SIGINT, frame)  # the server leaves what is under way when told so twice
        elif seconds:
            loop.call_soon_threadsafe(loop.call_later, seconds, stop, number, None)
        else:
            stop(number, frame)
        api.state.draining = True

    signal.signal(signal.SIGTERM, drain)
    try:
        yield
    finally:
        signal.signal(signal.SIGTERM, stop)
