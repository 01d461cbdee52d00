"""Who may write: a site without accounts takes changes only from the machine it runs on."""

from __future__ import annotations

from flask import Flask, abort, render_template, request
from flask_wtf.csrf import CSRFError

READING_METHODS = ("GET", "HEAD", "OPTIONS")
REFUSED = (
    "This site is served to other machines and has no accounts, so that nothing can be changed through it. Use the "
    "command line, or serve the registry on this machine alone: plutonbook serve --host 127.0.0.1."
)


STALE_FORM = (
    "Nothing was changed: the form that was sent does not come from this site as it runs now (it was started again "
    "since the page was loaded, or cookies are refused). Load the page again and repeat what you did."
)


def guard(app: Flask, writable: bool) -> None:
    """Answer every change with 403 where the site is not writable; before anything that was sent is looked at."""
    app.config["WRITABLE"] = writable

    @app.before_request
    def refuse() -> None:
        if request.method not in READING_METHODS and request.endpoint and not writable:
            abort(403, REFUSED)

    @app.errorhandler(CSRFError)
    def stale(_fault: CSRFError) -> tuple[str, int]:
        return render_template("error.html", title="The form is out of date", sentence=STALE_FORM, near=[]), 400

    @app.context_processor
    def say() -> dict[str, bool]:
        return {"writable": writable}
