"""The command ``plutonbook``: thin, and slow imports wait until a subcommand needs them."""

from __future__ import annotations

import importlib
import os
import sys
from typing import Any

import click

#: Set in the environment, it shows where in the program an unforeseen fault arose.
TRACEBACK = "PLUTONBOOK_TRACEBACK"
#: subcommand -> (module of registry.commands, name of the function there)
COMMANDS = {
    "create": ("registries", "create"),
    "upgrade": ("registries", "upgrade"),
    "check": ("registries", "check"),
    "backup": ("registries", "backup"),
    "recover": ("registries", "recover"),
    "import": ("data", "import_"),
    "refresh": ("data", "refresh"),
    "export": ("data", "export"),
    "batches": ("batches", "batches"),
    "digestion": ("batches", "digestion"),
    "withdraw": ("batches", "withdraw"),
    "restore-batch": ("batches", "restore_batch"),
    "settings": ("settings", "settings"),
    "account": ("accounts", "account"),
    "methods": ("methods", "methods"),
    "serve": ("serving", "serve"),
    "demo": ("serving", "demo"),
}


class LazyGroup(click.Group):
    """A group that imports a subcommand's module when it is called."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, name: str) -> click.Command | None:
        if name not in COMMANDS:
            return None
        module, function = COMMANDS[name]
        return getattr(importlib.import_module(f"registry.commands.{module}"), function)


@click.group(cls=LazyGroup, context_settings={"help_option_names": ["-h", "--help"]})
@click.option(
    "--registry",
    "registry_path",
    metavar="PATH-or-URL",
    help="The registry file, or a SQLAlchemy URL for PostgreSQL; also from PLUTONBOOK_REGISTRY.",
)
@click.version_option(package_name="plutonbook")
@click.pass_context
def group(ctx: click.Context, registry_path: str | None) -> None:
    """A register of drill and outcrop samples: which intrusions could have been a source of ore or heat, and why.

    Its verdicts are a screening aid, never a resource statement.
    """
    ctx.obj = registry_path


def main(arguments: list[str] | None = None) -> Any:
    """Run the command; every expected error ends in a sentence on standard error, never in a traceback."""
    from registry.errors import InputProblems, PlutonbookError

    try:
        code = group.main(args=arguments, prog_name="plutonbook", standalone_mode=False)
    except click.exceptions.Abort:
        click.echo("Stopped.", err=True)
        sys.exit(130)
    except click.ClickException as error:
        error.show()
        sys.exit(2)
    except InputProblems as error:
        _show_problems(error)
        sys.exit(error.exit_code)
    except PlutonbookError as error:
        click.echo(f"plutonbook: {error}", err=True)
        sys.exit(error.exit_code)
    except BrokenPipeError:
        sys.exit(141)
    except Exception as error:
        if os.environ.get(TRACEBACK):
            raise
        click.echo(f"plutonbook: {_unexpected(error)}", err=True)
        sys.exit(1)
    sys.exit(code if isinstance(code, int) else 0)


def _unexpected(error: Exception) -> str:
    """A fault that nobody foresaw, in words: of the disk and its folders, else of the program."""
    if isinstance(error, OSError) and error.strerror:
        named = f"{error.filename}: " if error.filename else ""
        return f"{named}{error.strerror}; see to the disk or the folder, then repeat this. What was begun is undone."
    if isinstance(error, MemoryError):
        return "the memory of this machine does not suffice; import fewer files at once. What was begun is undone."
    said = " ".join(str(error).split())[:300]
    return (
        f"a fault of the program, not of your data ({type(error).__name__}: {said}). What was begun is undone. Please "
        f"report it with what stands on the screen after {TRACEBACK}=1 is set and the command repeated."
    )


def _show_problems(error: Any) -> None:
    from registry.import_reports import remarks_in_short

    problems = [problem for problem in error.problems if problem.severity == "problem"]
    remarks = [problem for problem in error.problems if problem.severity != "problem"]
    for line in error.understood:
        click.echo(line, err=True)
    for problem in problems:
        click.echo(problem.sentence(), err=True)
    for sentence in remarks_in_short(remarks):
        click.echo(f"remark: {sentence}", err=True)
    count = f"{len(problems):,} {'problem' if len(problems) == 1 else 'problems'}"
    noted = f", {len(remarks):,} {'remark' if len(remarks) == 1 else 'remarks'}" if remarks else ""
    click.echo(f"plutonbook: {count}{noted}; nothing was written.", err=True)


if __name__ == "__main__":
    main()
