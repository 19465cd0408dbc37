"""The shortest way to what loggers and dashboards send one by one.

POST of estimates and of a station's readings, past the routing and dependencies of the framework,
which take as long as the rest. The routes are there for their description, and answer just so where
nothing leads around them.
"""

import re
from collections.abc import Callable, Coroutine
from dataclasses import dataclass
from typing import Any

from fastapi import FastAPI, Request, Response
from starlette.types import ASGIApp, Receive, Scope, Send

from service.routes import estimates
from service.routes.stored import readings
from service.stations.bodies import NAME

_KEPT = re.compile(readings.PATH.replace("{name}", f"({NAME.removeprefix('^').removesuffix('$')})"))
"""Names that are none go on to the routes, which say so."""


@dataclass(frozen=True, slots=True)
class Template:
    """What observers see of a route."""

    path: str


ESTIMATES, READINGS = Template(estimates.PATH), Template(readings.PATH)


class Direct:
    """ASGI layer that calls the operation itself; everything else goes on to the routes.

    What the operation raises is for the layers around it to answer.
    """

    def __init__(self, routes: ASGIApp, api: FastAPI) -> None:
        self.routes, self.api = routes, api

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Answer, or go on."""
        if scope["type"] == "http" and scope["method"] == "POST":
            path = scope["path"]
            if path == estimates.PATH:
                await self._answer(ESTIMATES, estimates.post_estimates, (), scope, receive, send)
                return
            if (kept := _KEPT.fullmatch(path)) is not None:
                named = (kept[1],)
                await self._answer(READINGS, readings.post_readings, named, scope, receive, send)
                return
        await self.routes(scope, receive, send)

    async def _answer(
        self,
        template: Template,
        operation: Callable[..., Coroutine[Any, Any, Response]],
        named: tuple[str, ...],
        scope: Scope,
        receive: Receive,
        send: Send,
    ) -> None:
        scope["app"], scope["route"] = self.api, template
        response = await operation(Request(scope, receive), *named)
        await response(scope, receive, send)
