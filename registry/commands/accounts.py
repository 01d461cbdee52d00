"""``plutonbook account``: who may change the registry through its site."""

from __future__ import annotations

import shlex
import sys
from pathlib import Path

import click

from registry.commands.options import json_option, registry_named, registry_option, say
from registry.errors import PlutonbookError, UsageError

HOW = (
    "give the password on standard input or in a file, as one line: plutonbook account {command} {name} "
    "--password-file FILE, or ... | plutonbook account {command} {name}; it is never asked for, and never stands in "
    "the command itself, where every user of this machine could read it"
)
#: Far more than the longest password takes.
_MOST_BYTES = 20_000
password_option = click.option(
    "--password-file",
    type=click.Path(path_type=Path),
    metavar="FILE",
    help="The file that holds the password in its one line; else it is read from standard input.",
)


@click.group(no_args_is_help=True)
@registry_option
@click.pass_context
def account(ctx: click.Context, registry_path: str | None) -> None:
    """Accounts: who may change the registry through its site; reading needs none.

    As soon as there is one account, the site takes changes from signed-in accounts only, from this machine too. The
    command line needs no account: whoever may write the file or the database may change it.
    """
    if registry_path:
        ctx.find_root().obj = registry_path


@account.command()
@click.argument("name")
@password_option
@registry_option
@json_option
def add(registry_path: str | None, name: str, password_file: Path | None, as_json: bool) -> None:
    """Add the account NAME; its password comes from standard input or a file, of at least 10 letters."""
    from registry import accounts
    from registry.store.engine import open_registry

    registry = open_registry(registry_named(registry_path))
    report = accounts.add(registry, name, _password("add", name, password_file))
    lines = [f"The account {report['account']} was added."]
    if report["first"]:
        lines.append("It is the first: from now on the site takes changes from signed-in accounts only.")
    say(report, lines, as_json)


@account.command()
@click.argument("name")
@password_option
@registry_option
@json_option
def password(registry_path: str | None, name: str, password_file: Path | None, as_json: bool) -> None:
    """Give the account NAME another password, which signs it out everywhere."""
    from registry import accounts
    from registry.store.engine import open_registry

    registry = open_registry(registry_named(registry_path))
    report = accounts.change_password(registry, name, _password("password", name, password_file))
    say(
        report,
        [f"The account {report['account']} has another password; wherever it was signed in, it is out."],
        as_json,
    )


@account.command()
@click.argument("name")
@registry_option
@json_option
def remove(registry_path: str | None, name: str, as_json: bool) -> None:
    """Remove the account NAME, which signs it out everywhere; what it did keeps its name."""
    from registry import accounts
    from registry.store.engine import open_registry

    report = accounts.remove(open_registry(registry_named(registry_path)), name)
    lines = [f"The account {report['account']} was removed; what it changed keeps its name."]
    if report["last"]:
        lines.append(
            "No account is left: a site served to this machine alone takes changes from whoever uses the machine, one "
            "served to others takes none."
        )
    say(report, lines, as_json)


@account.command("list")
@registry_option
@json_option
def list_(registry_path: str | None, as_json: bool) -> None:
    """List the accounts, oldest first."""
    from registry import accounts
    from registry.store.engine import open_registry

    rows = accounts.list_accounts(open_registry(registry_named(registry_path)))
    lines = [f"{row['account']}  added {row['created_at']}" for row in rows]
    none = ["No accounts yet. Add one with: plutonbook account add NAME --password-file FILE"]
    say({"accounts": rows}, lines or none, as_json)


def _password(command: str, name: str, file: Path | None) -> str:
    """The one line of the file or of standard input; UsageError where nothing came that could be one."""
    how = HOW.format(command=command, name=shlex.quote(name))
    sent: bytes | str
    if file is not None:
        try:
            with file.open("rb") as opened:
                sent = opened.read(_MOST_BYTES)
        except OSError as fault:
            raise UsageError(f"the password file {file} cannot be read ({fault.strerror}); {how}") from fault
        where = f"the file {file}"
    else:
        if sys.stdin is None or sys.stdin.closed or sys.stdin.isatty():
            raise UsageError(f"no password was given: {how}")
        sent = getattr(sys.stdin, "buffer", sys.stdin).read(_MOST_BYTES)
        where = "standard input"
    try:
        text = sent.decode("utf-8-sig") if isinstance(sent, bytes) else sent
    except UnicodeDecodeError as fault:
        raise PlutonbookError(f"{where} is not text in UTF-8, so it holds no password") from fault
    lines = text.splitlines()
    if not lines or not text.strip():
        raise UsageError(f"{where} is empty: {how}")
    if len(lines) > 1:
        raise PlutonbookError(f"{where} holds {len(lines)} lines; a password is one line")
    return lines[0]
