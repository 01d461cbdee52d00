"""What subcommands share: which registry, and how a report is printed."""

from __future__ import annotations

import json
import os
from collections.abc import Callable
from typing import Any

import click

from registry.errors import UsageError


def registry_option(function: Callable[..., Any]) -> Callable[..., Any]:
    """``--registry`` after the subcommand as well as before it."""
    return click.option(
        "--registry", "registry_path", metavar="PATH-or-URL", help="The registry file or a SQLAlchemy URL."
    )(function)


json_option = click.option("--json", "as_json", is_flag=True, help="Print the report as JSON.")


def registry_named(registry_path: str | None) -> str:
    """The registry to use: the option after or before the subcommand, else PLUTONBOOK_REGISTRY."""
    context = click.get_current_context()
    path = registry_path or context.find_root().obj or os.environ.get("PLUTONBOOK_REGISTRY")
    if not path:
        raise UsageError("no registry given: name one with --registry PATH-or-URL or in PLUTONBOOK_REGISTRY")
    return path


def without_password(path_or_url: str) -> str:
    """A registry as it may be printed: a URL without its password."""
    if "://" not in path_or_url:
        return path_or_url
    from sqlalchemy import make_url

    return make_url(path_or_url).render_as_string(hide_password=True)


def say(report: dict[str, Any], lines: list[str], as_json: bool) -> None:
    """A report as JSON, or its sentences."""
    if as_json:
        click.echo(json.dumps(report, indent=1, ensure_ascii=False, default=str))
    else:
        for line in lines:
            click.echo(line)
