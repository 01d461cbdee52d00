"""Signing in and out. Accounts are made on the command line: plutonbook account."""

from __future__ import annotations

import math
from datetime import UTC, datetime, timedelta
from typing import Any
from urllib.parse import urlsplit

from flask import (
    Blueprint,
    Flask,
    Response,
    current_app,
    make_response,
    redirect,
    render_template,
    request,
    session,
    url_for,
)
from flask_login import LoginManager, UserMixin, login_user, logout_user

from registry import accounts
from web.attempts import Attempts
from web.writing import SIGN_IN_FIRST, NotSignedIn, here, standing

blueprint = Blueprint("accounts", __name__)
LONGEST_ADDRESS = 2_000
WRONG = (
    "There is no account of that name and password. Mind the case of the letters of the password; who keeps the "
    "registry can give you another: plutonbook account password NAME."
)


class SignedIn(UserMixin):
    """The account of a session."""

    def __init__(self, account: accounts.Account) -> None:
        self.name = account.name
        self._id = f"{account.account_id}.{account.stamp}"

    def get_id(self) -> str:
        """What the session keeps: the id and the stamp of the password, so that either's end is the session's."""
        return self._id


def register(app: Flask) -> None:
    """Add the pages, and tell who is signed in by the session."""
    manager = LoginManager()
    manager.session_protection = None  # networks change under a laptop; the stamp is what ends a session
    manager.init_app(app, add_context_processor=False)
    manager.user_loader(_of_session)
    app.extensions["sign_in_attempts"] = Attempts()
    app.register_error_handler(NotSignedIn, _sign_in_first)
    app.register_blueprint(blueprint)


def _of_session(kept: str) -> SignedIn | None:
    number, _, stamp = kept.partition(".")
    if not number.isdecimal():
        return None
    account = accounts.of_session(current_app.extensions["registry"], int(number), stamp)
    return None if account is None else SignedIn(account)


def own_address(text: str | None) -> str | None:
    """The address if it is one of a page of this site, None for every other: nobody is sent elsewhere."""
    if not text or len(text) > LONGEST_ADDRESS or not text.isprintable() or "\\" in text or " " in text:
        return None
    if not text.startswith("/") or text.startswith("//"):
        return None
    try:
        parts = urlsplit(text)
    except ValueError:
        return None
    if parts.scheme or parts.netloc or parts.path in (url_for("accounts.page"), url_for("accounts.sign_out")):
        return None
    return text


@blueprint.get("/sign-in")
def page() -> Any:
    back = own_address(request.args.get("next"))
    if standing().account and back:
        return redirect(back, 303)
    return _page(back)


@blueprint.post("/sign-in")
def sign_in() -> Any:
    back = own_address(request.form.get("next"))
    name, password = request.form.get("name", ""), request.form.get("password", "")
    if not standing().accounts:
        return _page(back, status=400)
    if not name.strip() or not password:
        missing = "a name" if password else "a password" if name.strip() else "a name and a password"
        return _page(back, name, fault=f"Signing in takes {missing}.", status=400)
    attempts: Attempts = current_app.extensions["sign_in_attempts"]
    address = request.remote_addr or ""
    wait_s = attempts.begin(name, address)
    if wait_s:
        answer = _page(back, name, fault=_later(wait_s), status=429)
        answer.headers["Retry-After"] = str(wait_s)
        return answer
    account = accounts.sign_in(current_app.extensions["registry"], name, password)
    if account is None:
        return _page(back, name, fault=WRONG, status=403)
    attempts.succeeded(name, address)
    session.clear()  # a new session, with a new token for its forms
    login_user(SignedIn(account))
    return redirect(back or url_for("start.page"), 303)


@blueprint.post("/sign-out")
def sign_out() -> Any:
    logout_user()
    session.clear()
    return redirect(url_for("start.page"), 303)


def _later(wait_s: int) -> str:
    minutes = math.ceil(wait_s / 60)
    clock = datetime.now(UTC) + timedelta(seconds=wait_s + 59)
    return (
        f"Too many attempts failed. Try again in {minutes} {'minute' if minutes == 1 else 'minutes'}, at "
        f"{clock:%H:%M} UTC."
    )


def _sign_in_first(_fault: NotSignedIn) -> Response:
    return _page(own_address(here()), notice=SIGN_IN_FIRST, status=403)


def _page(back: str | None, name: str = "", *, fault: str = "", notice: str = "", status: int = 200) -> Response:
    answer = make_response(
        render_template("sign_in.html", section="Sign in", back=back, name=name[:200], fault=fault, notice=notice),
        status,
    )
    answer.headers["Cache-Control"] = "no-store"
    return answer
