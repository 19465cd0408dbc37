"""Who may ask what: bearer keys, and the scope that each request needs."""

from collections.abc import Mapping
from types import MappingProxyType

from starlette.datastructures import Headers
from starlette.types import ASGIApp, Receive, Scope, Send

from service.errors import Forbidden, Unauthenticated
from service.settings import Settings, SettingsError
from service.store.keys import KeyFile, Reach

GUARDED = "/v1/"
"""What lies elsewhere says nothing about anyone's soil: health, documentation, problem types."""

READS: frozenset[str] = frozenset({"/v1/estimates"})
"""Paths whose POST computes and keeps nothing."""

CHALLENGE: Mapping[str, str] = MappingProxyType(
    {"WWW-Authenticate": 'Bearer realm="gleyline"', "Cache-Control": "no-store"}
)


def keys_of(settings: Settings) -> KeyFile:
    """The keys of this service; raises SettingsError where it may not start without one."""
    keys = KeyFile(settings.data / "keys.json")
    if not settings.on_loopback and not keys.active():
        raise SettingsError(
            f"host {settings.host} can be reached from other machines, and there is no key in "
            f"{keys.path}; make one with: gleyline key add LABEL --data {settings.data}"
        )
    return keys


def scope_needed(method: str, path: str) -> Reach:
    """The scope a key must have for a request."""
    if method in {"GET", "HEAD", "OPTIONS"} or (method == "POST" and path in READS):
        return "read"
    return "write"


class RequireKey:
    """ASGI layer that lets a request through when its key reaches that far.

    Keys are optional while the service is bound to loopback and none was ever made.
    """

    def __init__(self, app: ASGIApp, keys: KeyFile, *, on_loopback: bool) -> None:
        self.app = app
        self.keys = keys
        self.on_loopback = on_loopback

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Raise Unauthenticated or Forbidden, or go on."""
        guarded = scope["type"] == "http" and scope["path"].startswith(GUARDED)
        if guarded and not (self.on_loopback and not self.keys.all()):
            self._check(scope)
        await self.app(scope, receive, send)

    def _check(self, scope: Scope) -> None:
        given = Headers(scope=scope).getlist("authorization")
        kind, _, secret = given[0].partition(" ") if len(given) == 1 else ("", "", "")
        if kind.lower() != "bearer" or not secret.strip():
            raise Unauthenticated(
                "send one header: Authorization: Bearer <key>; keys in the query are not read",
                headers=CHALLENGE,
            )
        key = self.keys.find(secret.strip())
        if key is None:
            refusal = CHALLENGE["WWW-Authenticate"] + ', error="invalid_token"'
            raise Unauthenticated(
                "this key is not known, or was revoked", headers={"WWW-Authenticate": refusal}
            )
        scope["state"]["key_label"] = key.label
        needed = scope_needed(scope["method"], scope["path"])
        if needed not in key.scopes:
            refusal = f'{CHALLENGE["WWW-Authenticate"]}, error="insufficient_scope"'
            raise Forbidden(
                f"the key {key.label} has the scopes {', '.join(key.scopes)}; "
                f"{scope['method']} {scope['path']} needs {needed}",
                headers={"WWW-Authenticate": f'{refusal}, scope="{needed}"'},
            )
