"""The shortest way to POST /v1/estimates: past the routing and dependencies of the framework.

The route is there for its description, and answers just so where nothing leads around it.
"""

from dataclasses import dataclass

from fastapi import FastAPI, Request
from starlette.types import ASGIApp, Receive, Scope, Send

from service.routes.estimates import PATH, post_estimates


@dataclass(frozen=True, slots=True)
class Template:
    """What observers see of a route."""

    path: str


class Direct:
    """ASGI layer that calls the operation itself; everything else goes on to the routes.

    What the operation raises is for the layers around it to answer.
    """

    def __init__(self, routes: ASGIApp, api: FastAPI) -> None:
        self.routes, self.api = routes, api
        self._template = Template(PATH)

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Answer, or go on."""
        if scope["type"] == "http" and scope["path"] == PATH and scope["method"] == "POST":
            scope["app"], scope["route"] = self.api, self._template
            response = await post_estimates(Request(scope, receive))
            await response(scope, receive, send)
        else:
            await self.routes(scope, receive, send)
