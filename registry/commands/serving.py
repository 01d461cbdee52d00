"""``plutonbook serve`` and ``demo``."""

from __future__ import annotations

from pathlib import Path

import click

from registry.commands.options import registry_named, registry_option
from registry.errors import UsageError

DEMO_PATH = Path(".plutonbook") / "demo.sqlite"


@click.command()
@registry_option
@click.option("--host", default="127.0.0.1", show_default=True)
@click.option("--port", default=8000, show_default=True, type=click.IntRange(1, 65535))
def serve(registry_path: str | None, host: str, port: int) -> None:
    """Serve the site."""
    from registry.store.engine import open_registry

    path = registry_named(registry_path)
    open_registry(path).close()
    _serve(path, host, port)


@click.command()
@registry_option
@click.option("--no-serve", is_flag=True, help="Build the demo registry and stop.")
@click.option("--port", type=click.IntRange(1, 65535), help="Else a free port is taken.")
def demo(registry_path: str | None, no_serve: bool, port: int | None) -> None:
    """Build the demo registry from invented data through the ordinary import, and serve it."""
    from registry.founding import build_demo

    try:
        path = registry_named(registry_path)
    except UsageError:
        DEMO_PATH.parent.mkdir(exist_ok=True)
        path = str(DEMO_PATH)
    for line in build_demo(path):
        click.echo(line)
    if not no_serve:
        _serve(path, "127.0.0.1", port or 0)


def _serve(path: str, host: str, port: int) -> None:
    from web.serving import serve as serve_site

    try:
        serve_site(path, host, port, announce=_announce)
    except OSError as error:
        raise UsageError(
            f"port {port} on {host} cannot be used ({error.strerror}); choose another with --port"
        ) from error


def _announce(address: str) -> None:
    click.echo(f"Plutonbook is at {address} (stop: Ctrl-C)")
