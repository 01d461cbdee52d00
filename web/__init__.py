"""The site: pages over one registry, read without ever writing to it."""

from __future__ import annotations

import secrets

from flask import Flask
from flask_wtf import CSRFProtect

from registry.store.reading.session import open_for_reading
from web import batches, errors, methods, numbers, pictures, places, sample, samples, security, targets, wording

__all__ = ["create_app"]


def create_app(registry_path_or_url: str) -> Flask:
    """The Flask application over the registry at a path or SQLAlchemy URL.

    Raises the sentence of ``open_registry`` where there is no registry or it is of another version.
    """
    app = Flask(__name__)
    # Signs nothing that outlives the process: no page keeps a session yet.
    app.config["SECRET_KEY"] = secrets.token_bytes(32)
    app.extensions["registry"] = open_for_reading(registry_path_or_url)
    app.jinja_env.trim_blocks = app.jinja_env.lstrip_blocks = True
    CSRFProtect(app)
    security.protect(app)
    numbers.register(app)
    pictures.register(app)
    wording.register(app)
    errors.register(app)
    for part in (samples, sample, batches, targets, methods, places):
        app.register_blueprint(part.blueprint)
    return app
