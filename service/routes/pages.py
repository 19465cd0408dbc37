"""GET / and /docs: pages that need nothing from any other host."""

from collections.abc import Mapping
from functools import cache
from html import escape
from importlib.resources import files

from fastapi import APIRouter, Request, Response

from service import __version__
from service.errors import NotFound
from service.routes.etag import tagged

PAGE = files("service.page")
SWAGGER = files("fastapi_offline").joinpath("static")

START_POLICY = {
    "Content-Security-Policy": "default-src 'none'; style-src 'unsafe-inline'; img-src 'self'; "
    "base-uri 'none'; form-action 'none'; frame-ancestors 'none'"
}
DOCS_POLICY = {
    "Content-Security-Policy": "default-src 'none'; script-src 'self'; "
    "style-src 'self' 'unsafe-inline'; img-src 'self' data:; connect-src 'self'; "
    "base-uri 'none'; form-action 'none'; frame-ancestors 'none'"
}
"""The documentation page sets styles on its elements, so inline styles are let in there."""

ASSETS: Mapping[str, str] = {
    "swagger-ui-bundle.js": "text/javascript",
    "swagger-ui.css": "text/css",
    "docs.js": "text/javascript",
    "docs.css": "text/css",
}
"""What the documentation page is made of, with its media types."""

router = APIRouter(include_in_schema=False)


@router.get("/")
async def start_page(request: Request) -> Response:
    """What the service does, with a command that works as it stands."""
    base = escape(str(request.base_url).rstrip("/"))
    page = _read("start.html").decode()
    page = page.replace("{{base}}", base).replace("{{version}}", __version__)
    return tagged(request, page.encode(), "text/html", START_POLICY)


@router.get("/favicon.ico")
async def icon(request: Request) -> Response:
    """What a browser asks for beside any page or document."""
    return tagged(request, _read("icon.svg"), "image/svg+xml")


@router.get("/docs")
async def docs_page(request: Request) -> Response:
    """Every operation, to read and to try."""
    return tagged(request, _read("docs.html"), "text/html", DOCS_POLICY)


@router.get("/docs/{name}")
async def docs_asset(request: Request, name: str) -> Response:
    """A file that the documentation page is made of."""
    if name not in ASSETS:
        raise NotFound("the documentation page has no such part")
    return tagged(request, _read(name), ASSETS[name])


@cache
def _read(name: str) -> bytes:
    """A file of our own, or else of the package that carries the documentation page."""
    own = PAGE.joinpath(name)
    return (own if own.is_file() else SWAGGER.joinpath(name)).read_bytes()
