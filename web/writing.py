"""Who may write. Reading is open to whoever reaches the site.

Without accounts a site takes changes only where this machine alone can ask. As soon as the registry holds an account,
changes need a signed-in one, from this machine too.
"""

from __future__ import annotations

from dataclasses import dataclass
from typing import Any
from urllib.parse import quote, urlsplit

from flask import Flask, abort, current_app, g, redirect, render_template, request, url_for
from flask_login import current_user
from flask_wtf.csrf import CSRFError
from markupsafe import Markup

from registry import accounts, auditing

READING_METHODS = ("GET", "HEAD", "OPTIONS")
REFUSED = (
    "This site is served to other machines and has no accounts, so that nothing can be changed through it. Use the "
    "command line: plutonbook account add NAME gives it an account, plutonbook serve --host 127.0.0.1 serves it on "
    "this machine alone."
)
SIGN_IN_FIRST = "Nothing was changed: this needs a signed-in account. Sign in, then repeat what you did."
STALE_FORM = (
    "Nothing was changed: the form that was sent does not belong to this session (you signed in or out since the page "
    "was loaded, it is more than a week old, or cookies are refused). Load the page again and repeat what you did."
)
#: What may be sent without being allowed to write; nothing of the registry is changed by it.
OPEN_ENDPOINTS = ("accounts.sign_in", "accounts.sign_out")
#: Bytes that a sign-in form may have.
LARGEST_SIGN_IN_BYTES = 32 * 1024


class NotSignedIn(Exception):
    """A change was sent by nobody who signed in, to a registry with accounts."""


@dataclass(frozen=True)
class Standing:
    """Whether the registry has accounts, which of them is signed in, and whether this request may write."""

    accounts: bool = False
    account: str | None = None
    writable: bool = False


def standing() -> Standing:
    """What the one who asks may do; the registry is asked once a request, so that a removed account is out at once."""
    if "standing" not in g:
        g.standing = Standing()  # what a page about the fault goes by, where the registry cannot be asked
        g.standing = _asked()
    found: Standing = g.standing
    return found


def _asked() -> Standing:
    if not accounts.any_accounts(current_app.extensions["registry"]):
        return Standing(writable=current_app.config["WRITABLE"])
    name = current_user.name if current_user.is_authenticated else None
    return Standing(True, name, name is not None)


def require() -> None:
    """End the request unless it may write: a page to sign in where that helps, else 403."""
    now = standing()
    if now.writable:
        return
    if not now.accounts:
        abort(403, REFUSED)
    if request.method not in READING_METHODS:
        raise NotSignedIn
    abort(redirect(sign_in_address(), 303))


def here() -> str:
    """The address of the page one is on (of the page a form was sent from), to come back to; ``/`` where unknown."""
    if request.method in READING_METHODS:
        query = request.query_string.decode("latin-1")
        return quote(request.path) + (f"?{query}" if query else "")
    came = urlsplit(request.referrer or "")
    if came.netloc != request.host or not came.path:
        return "/"
    return came.path + (f"?{came.query}" if came.query else "")


def sign_in_address() -> str:
    """Where to sign in and come back from."""
    return url_for("accounts.page", next=here())


def sign_in_to(purpose: str) -> Markup:
    """Stands in the place of a button for whoever has not signed in; empty where signing in is not what is missing."""
    now = standing()
    if now.writable or not now.accounts:
        return Markup("")
    return Markup('<p class="soft"><a href="{}">Sign in</a> to {}.</p>').format(sign_in_address(), purpose)


def guard(app: Flask, writable: bool) -> None:
    """Refuse changes of whoever may not write, before anything that was sent is looked at.

    ``writable``: whether a registry without accounts takes changes.
    """
    app.config["WRITABLE"] = writable

    @app.before_request
    def refuse() -> None:
        if not request.endpoint or request.endpoint == "static":
            return
        auditing.act_for(standing().account)
        if request.endpoint in OPEN_ENDPOINTS:
            request.max_content_length = LARGEST_SIGN_IN_BYTES
        elif request.method not in READING_METHODS:
            require()

    @app.teardown_request
    def nobody_any_more(_fault: BaseException | None) -> None:
        auditing.act_for(None)

    @app.errorhandler(CSRFError)
    def stale(_fault: CSRFError) -> tuple[str, int]:
        return render_template("error.html", title="The form is out of date", sentence=STALE_FORM, near=[]), 400

    @app.context_processor
    def say() -> dict[str, Any]:
        now = standing()
        return {
            "writable": now.writable,
            "standing": now,
            "sign_in_to": sign_in_to,
            "sign_in_address": sign_in_address,
        }
