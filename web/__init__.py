"""The site: pages over one registry; what changes it goes through the use cases, from this machine alone."""

from __future__ import annotations

import secrets
import zlib
from typing import Any

from flask import Flask
from flask_wtf import CSRFProtect

from registry.store.reading.session import open_for_reading
from web import (
    batches,
    diagrams,
    editing,
    errors,
    importing,
    intrusions,
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
    writing,
)

__all__ = ["create_app"]


def create_app(registry_path_or_url: str, writable: bool = False, drafts: Any = None) -> Flask:
    """The Flask application over the registry at a path or SQLAlchemy URL.

    ``writable``: whether the pages may change the registry (there are no accounts: only where this machine alone can
    ask). ``drafts`` is the folder for files on their way in; None: the user's own.

    Raises the sentence of ``open_registry`` where there is no registry or it is of another version.
    """
    app = Flask(__name__)
    # Signs nothing that outlives the process: the session holds the token of the forms only.
    app.config["SECRET_KEY"] = secrets.token_bytes(32)
    # Cookies know no ports: two registries served on one machine must not take each other's.
    app.config["SESSION_COOKIE_NAME"] = f"plutonbook-{zlib.crc32(registry_path_or_url.encode()):08x}"
    app.config["SESSION_COOKIE_SAMESITE"] = "Strict"
    app.config["WTF_CSRF_TIME_LIMIT"] = None
    app.extensions["registry"] = open_for_reading(registry_path_or_url)
    app.jinja_env.trim_blocks = app.jinja_env.lstrip_blocks = True
    writing.guard(app, writable)
    CSRFProtect(app)
    security.protect(app)
    numbers.register(app)
    pictures.register(app)
    wording.register(app)
    errors.register(app)
    for part in (start, samples, sample, diagrams, batches, targets, methods, intrusions, sites, settings, editing):
        app.register_blueprint(part.blueprint)
    importing.register(app, drafts)
    return app
