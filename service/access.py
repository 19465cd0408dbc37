"""Who may ask what, and how often: bearer keys, the scope each request needs, a rate for each."""

import math
import time
from collections.abc import Mapping
from types import MappingProxyType

from starlette.datastructures import Headers, MutableHeaders
from starlette.types import ASGIApp, Message, Receive, Scope, Send

from service.errors import Forbidden, Unauthenticated
from service.settings import Settings, SettingsError
from service.stations.problems import TooManyRequests
from service.store.keys import Key, KeyFile, Reach

GUARDED = "/v1/"
"""What lies elsewhere says nothing about anyone's soil: health, documentation, problem types."""

READS: frozenset[str] = frozenset({
    "/v1/estimates", "/v1/waveforms", "/v1/reflections", "/v1/scattering", "/v1/spectra",
    "/v1/calibrations", "/v1/root-zone", "/v1/leaching", "/v1/soil-state", "/v1/in-place-density",
})  # fmt: skip
"""Paths whose POST computes and keeps nothing."""

STATIONS, CHANGES = "/v1/stations/", "/v1/changes"
DESCRIBED = ("/v1/soils/", "/v1/probes/")
"""Paths of what readings are interpreted by: changing them changes every estimate."""

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
    if path == CHANGES or (
        method in {"PUT", "PATCH", "DELETE"} and path.startswith((*DESCRIBED, STATIONS))
    ):
        return "manage"
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
        if key.stations:
            scope["state"]["key_stations"] = key.stations
            _check_station(key, needed, scope["path"])


def _check_station(key: Key, needed: Reach, path: str) -> None:
    """Raise Forbidden for other stations, and for changing what all stations share."""
    name = path.removeprefix(STATIONS).partition("/")[0] if path.startswith(STATIONS) else None
    if name in key.stations or (name is None and needed == "read"):
        return
    refusal = CHALLENGE["WWW-Authenticate"] + ', error="insufficient_scope"'
    raise Forbidden(
        f"the key {key.label} reaches the stations {', '.join(key.stations)} and nothing else",
        headers={"WWW-Authenticate": refusal},
    )


class LimitRate:
    """ASGI layer that lets each key ask so often, in this process.

    A bucket of a minute's requests that fills at an even rate: a burst is let through, a flood is
    not. Where there are no keys, an address has a bucket.
    """

    WINDOW = 60
    MOST_BUCKETS = 10_000

    def __init__(self, app: ASGIApp, per_minute: int) -> None:
        self.app = app
        self.quota = per_minute
        self._buckets: dict[str, tuple[float, float]] = {}
        """What is left, and when it was."""

    async def __call__(self, scope: Scope, receive: Receive, send: Send) -> None:
        """Raise TooManyRequests, or go on and tell what is left."""
        if not self.quota or scope["type"] != "http" or not scope["path"].startswith(GUARDED):
            await self.app(scope, receive, send)
            return
        whose = scope["state"].get("key_label") or f"@{(scope.get('client') or ('',))[0]}"
        left, wait = self._take(whose)
        told = {
            "RateLimit-Policy": f'"default";q={self.quota};w={self.WINDOW}',
            "RateLimit": f'"default";r={left};t={math.ceil(wait)}',
        }
        if left < 0:
            told["RateLimit"] = f'"default";r=0;t={math.ceil(wait)}'
            raise TooManyRequests(
                f"{self.quota} requests in {self.WINDOW} s were agreed for this key; wait "
                f"{math.ceil(wait)} s",
                headers={**told, "Retry-After": str(math.ceil(wait))},
            )

        async def outwards(message: Message) -> None:
            if message["type"] == "http.response.start":
                MutableHeaders(scope=message).update(told)
            await send(message)

        await self.app(scope, receive, outwards)

    def _take(self, whose: str) -> tuple[int, float]:
        """Requests left after this one, below 0: none; and seconds until there is one more."""
        now = time.monotonic()
        rate = self.quota / self.WINDOW
        left, since = self._buckets.get(whose, (float(self.quota), now))
        left = min(self.quota, left + (now - since) * rate)
        if left < 1.0:
            return -1, (1.0 - left) / rate
        if len(self._buckets) >= self.MOST_BUCKETS:
            self._buckets.clear()
        self._buckets[whose] = (left - 1.0, now)
        return int(left - 1.0), 1.0 / rate
