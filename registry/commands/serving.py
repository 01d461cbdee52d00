"""``plutonbook serve`` and ``demo``."""

from __future__ import annotations

import re
from pathlib import Path

import click

from registry.commands.options import registry_named, registry_option
from registry.errors import UsageError

DEMO_PATH = Path(".plutonbook") / "demo.sqlite"
#: A name as it stands in an address, with a port or without.
_HOST_NAME = re.compile(r"[A-Za-z0-9]([A-Za-z0-9.-]*[A-Za-z0-9])?(:[0-9]{1,5})?")


@click.command()
@registry_option
@click.option("--host", default="127.0.0.1", show_default=True)
@click.option("--port", default=8000, show_default=True, type=click.IntRange(1, 65535))
@click.option(
    "--https-name",
    metavar="NAME",
    help="A proxy serves the site to others under https://NAME: cookies are then for https alone, changes need an "
    "account.",
)
def serve(registry_path: str | None, host: str, port: int, https_name: str | None) -> None:
    """Serve the site.

    Without accounts (plutonbook account) it takes changes from this machine alone; with accounts, from those who
    signed in.
    """
    from registry.accounts import any_accounts
    from registry.store.engine import open_registry
    from web.serving import LOOPBACK

    if https_name is not None and not _HOST_NAME.fullmatch(https_name):
        raise UsageError(f"'{https_name}' is no name of a host; write it as in an address, without https://")
    path = registry_named(registry_path)
    registry = open_registry(path)
    with_accounts = any_accounts(registry)
    registry.close()
    if with_accounts and https_name is None and host not in LOOPBACK:
        click.echo(
            f"Warning: served on {host} over plain http, passwords and cookies can be read on the way. Put a proxy "
            "that gives https in front of it, serve with --host 127.0.0.1 --https-name NAME, and let no other machine "
            "reach this port.",
            err=True,
        )
    _serve(path, host, port, https_name)


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


def _serve(path: str, host: str, port: int, https_name: str | None = None) -> None:
    from web.serving import serve as serve_site

    try:
        serve_site(path, host, port, announce=lambda address: _announce(address, https_name), https_name=https_name)
    except OSError as error:
        raise UsageError(
            f"port {port} on {host} cannot be used ({error.strerror}); choose another with --port"
        ) from error


def _announce(address: str, https_name: str | None) -> None:
    told = f"Plutonbook is at {address}"
    if https_name is not None:
        told = f"Plutonbook is at https://{https_name}/ once a proxy passes that on to {address}"
    click.echo(f"{told} (stop: Ctrl-C)")
