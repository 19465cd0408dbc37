"""The command gleyline: serve, convert, demo, key, store, openapi."""

import errno
import json
import logging
import os
import signal
import socket
import sys
import time
from collections.abc import Callable
from pathlib import Path
from typing import Any, get_args

import click
import uvicorn
from uvicorn.supervisors import Multiprocess

from service import __version__
from service.access import keys_of
from service.convert import convert
from service.demo.run import demo
from service.logs import logging_config
from service.metrics import shared_by
from service.settings import Settings, SettingsError, data_folder, misspelt, read_settings, variable
from service.store.command import store
from service.store.errors import StoreError
from service.store.keys import SCOPES, KeyFile, KeyFileError, Reach
from service.store.opening import open_store

log = logging.getLogger("gleyline")

PAUSE = 0.1
"""Seconds between two looks at processes that are to end."""
METAVARS = {int: "N", float: "SECONDS", Path: "DIR", str: "TEXT"}


@click.group(context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100})
@click.version_option(__version__, prog_name="gleyline")
def main() -> None:
    """Soil water content, with its band, from dielectric probe readings."""


def one_option_per_setting(command: Callable[..., None]) -> Callable[..., None]:
    """Give a command an option for every setting; what is left out, the environment decides."""
    for name, setting in reversed(Settings.model_fields.items()):
        default = setting.get_default(call_default_factory=True, validated_data={})
        kind: Any = setting.annotation
        command = click.option(
            f"--{name.replace('_', '-')}",
            name,
            metavar=METAVARS.get(kind) or "|".join(get_args(kind)),
            help=f"{setting.description}  [{variable(name)}; default: {default}]",
        )(command)
    return command


@main.command()
@one_option_per_setting
def serve(**given: str | None) -> None:
    """Answer over HTTP until told to stop.

    Every option is also the environment variable that stands beside it.
    """
    try:
        settings = read_settings(**{name: text for name, text in given.items() if text is not None})
        keys_of(settings)
        open_store(settings).close()
    except (SettingsError, KeyFileError) as error:
        raise click.ClickException(str(error)) from None
    except StoreError as error:
        raise click.ClickException(error.told()) from None
    os.environ.update(settings.as_environment())  # what each server process reads
    config = uvicorn.Config(
        "service.app:create_app",
        factory=True,
        workers=settings.workers,
        access_log=False,
        server_header=False,
        ws="none",
        log_config=logging_config(settings.log_format),
        timeout_graceful_shutdown=int(settings.request_seconds) + 1,
        limit_concurrency=settings.connections,
    )
    for sentence in misspelt(os.environ):
        log.warning("%s", sentence)
    listener = _listen(settings)
    host, port = listener.getsockname()[:2]
    log.info(
        "gleyline %s serves http://%s:%d", __version__, f"[{host}]" if ":" in host else host, port
    )
    server = uvicorn.Server(config)
    try:
        if settings.workers > 1:
            with shared_by(settings.workers):
                Workers(config, sockets=[listener]).run()
        else:
            server.run(sockets=[listener])
            if not server.started:
                sys.exit(1)
    except KeyboardInterrupt:
        click.echo()


class Workers(Multiprocess):
    """Server processes that are told again when the signal to stop comes again."""

    def join_all(self) -> None:
        """Wait for the end of what is under way, or of patience."""
        told = len(self.signal_queue)
        while any(process.exitcode is None for process in self.processes):
            time.sleep(PAUSE)
            if len(self.signal_queue) > told:
                told = len(self.signal_queue)
                for process in self.processes:
                    if process.exitcode is None and process.pid is not None:
                        os.kill(process.pid, signal.SIGTERM)
        super().join_all()


def _listen(settings: Settings) -> socket.socket:
    family = socket.AF_INET6 if ":" in settings.host else socket.AF_INET
    try:
        return socket.create_server((settings.host, settings.port), family=family)
    except OSError as error:
        hint = "; another program has it" if error.errno == errno.EADDRINUSE else ""
        raise click.ClickException(
            f"cannot listen on {settings.host} port {settings.port}{hint} ({error.strerror}); "
            "choose another with --port"
        ) from None


data_option = click.option(
    "--data",
    type=click.Path(path_type=Path),
    envvar=variable("data"),
    default=data_folder,
    metavar="DIR",
    help=f"folder of keys and data  [{variable('data')}; default: {data_folder()}]",
)


@main.group()
def key() -> None:
    """Make, list and revoke the keys of clients."""


@key.command("add")
@click.argument("label")
@click.option("--scope", "scopes", multiple=True, type=click.Choice(SCOPES), default=["read"],
              help="what the key allows; may be given several times  [default: read]")  # fmt: skip
@click.option("--station", "stations", multiple=True, metavar="NAME",
              help="the only station it reaches; repeatable  [default: all]")  # fmt: skip
@data_option
def add_key(label: str, scopes: tuple[Reach, ...], stations: tuple[str, ...], data: Path) -> None:
    """Make a key and print it: it cannot be shown again."""
    try:
        secret = KeyFile(data / "keys.json").add(label, tuple(dict.fromkeys(scopes)), stations)
    except KeyFileError as error:
        raise click.ClickException(str(error)) from None
    click.echo(secret)
    click.echo("Keep it now: only its hash is stored. Send it as Authorization: Bearer.", err=True)
    if stations:
        click.echo(f"It reaches {', '.join(stations)} alone, be it there or not.", err=True)


@key.command("list")
@data_option
def list_keys(data: Path) -> None:
    """Show every key that was ever made, without the keys themselves."""
    try:
        keys = KeyFile(data / "keys.json").all()
    except KeyFileError as error:
        raise click.ClickException(str(error)) from None
    for known in keys:
        ended = f"revoked {known.revoked:%Y-%m-%d %H:%M}" if known.revoked else "active"
        scopes = ",".join(known.scopes) + "".join(f" {name}" for name in known.stations)
        click.echo(f"{known.label}\t{scopes}\tmade {known.created:%Y-%m-%d %H:%M}\t{ended}")


@key.command("revoke")
@click.argument("label")
@data_option
def revoke_key(label: str, data: Path) -> None:
    """End a key; a running service takes note at once."""
    try:
        KeyFile(data / "keys.json").revoke(label)
    except KeyFileError as error:
        raise click.ClickException(str(error)) from None


@main.command()
def openapi() -> None:
    """Print the description of the interface as OpenAPI."""
    from service.app import create_api  # noqa: PLC0415 - the other commands need no science

    click.echo(
        json.dumps(create_api(Settings.model_construct()).openapi(), indent=2, ensure_ascii=False)
    )


main.add_command(convert)
main.add_command(store)
main.add_command(demo)


if __name__ == "__main__":
    main()
