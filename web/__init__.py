"""The site: pages over one registry; what changes it goes through the use cases, by whoever may write."""

from __future__ import annotations

import zlib
from datetime import timedelta
from typing import Any

from flask import Flask
from flask_wtf import CSRFProtect

from registry.server_secrets import signing_key
from registry.store.reading.session import open_for_reading
from web import (
    accounts,
    batches,
    control_history,
    diagrams,
    editing,
    errors,
    importing,
    intrusions,
    log,
    maps,
    methods,
    numbers,
    pictures,
    sample,
    samples,
    security,
    settings,
    sites,
    start,
    targets,
    wording,
    working,
    writing,
)

__all__ = ["create_app"]


def create_app(registry_path_or_url: str, writable: bool = False, drafts: Any = None, https: bool = False) -> Flask:
    """The Flask application over the registry at a path or SQLAlchemy URL.

    ``writable``: whether the pages may change a registry without accounts (only where this machine alone can ask);
    with accounts, a signed-in one may. ``drafts`` is the folder for files and work on their way; None: the user's own.
    ``https``: the site is reached over https alone, so its cookie must not go over anything else.

    Raises the sentence of ``open_registry`` where there is no registry or it is of another version.
    """
    app = Flask(__name__)
    registry = app.extensions["registry"] = open_for_reading(registry_path_or_url)
    app.config["SECRET_KEY"] = signing_key(registry.url)
    # Cookies know no ports: two registries served on one machine must not take each other's.
    app.config["SESSION_COOKIE_NAME"] = f"plutonbook-{zlib.crc32(registry_path_or_url.encode()):08x}"
    app.config["SESSION_COOKIE_HTTPONLY"] = True
    app.config["SESSION_COOKIE_SAMESITE"] = "Lax"
    app.config["SESSION_COOKIE_SECURE"] = https
    # The cookie ends with the browser; one that a browser brings back counts for a week after signing in.
    app.config["PERMANENT_SESSION_LIFETIME"] = timedelta(days=7)
    app.config["WTF_CSRF_TIME_LIMIT"] = None
    app.jinja_env.trim_blocks = app.jinja_env.lstrip_blocks = True
    accounts.register(app)
    writing.guard(app, writable)
    CSRFProtect(app)
    security.protect(app)
    numbers.register(app)
    pictures.register(app)
    wording.register(app)
    errors.register(app)
    for part in (
        start,
        samples,
        sample,
        diagrams,
        maps,
        batches,
        control_history,
        targets,
        methods,
        intrusions,
        sites,
        settings,
        editing,
        log,
    ):
        app.register_blueprint(part.blueprint)
    working.register(app, drafts)
    importing.register(app)
    return app
