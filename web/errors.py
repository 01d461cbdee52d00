"""What a reader sees when something is wrong: a sentence that says what, and where to go on."""

from __future__ import annotations

from flask import Flask, Response, render_template, request
from werkzeug.exceptions import HTTPException, SecurityError

from registry.errors import NotFound, PlutonbookError, RegistryBusy
from web.writing import OPEN_ENDPOINTS


class Missing(Exception):
    """A thing named in the address is not in the registry; ``near`` holds (words, address) that may be meant."""

    def __init__(self, what: str, name: str, near: list[tuple[str, str]] | None = None) -> None:
        super().__init__(f"The registry holds no {what} “{name}”.")
        self.near = near or []


def _page(status: int, title: str, sentence: str, near: list[tuple[str, str]] | None = None) -> tuple[str, int]:
    return render_template("error.html", title=title, sentence=sentence, near=near or []), status


def _missing(fault: Missing) -> tuple[str, int]:
    return _page(404, "Not found", str(fault), fault.near)


def _http(fault: HTTPException) -> tuple[str, int, dict[str, str]]:
    known = {
        404: f"This site has no page at {request.path}.",
        405: f"The page at {request.path} can only be read; nothing is sent to it.",
        413: "What was sent is larger than the 200 MB that this page takes. Send fewer files at once, or read a large "
        "file on the command line: plutonbook import FILE.",
    }
    if request.endpoint in OPEN_ENDPOINTS:
        known[413] = "What was sent is larger than a name and a password can be."
    status = fault.code or 500
    headers = {}
    if status == 405 and getattr(fault, "valid_methods", None):
        headers["Allow"] = ", ".join(fault.valid_methods)  # type: ignore[attr-defined]
    sentence = known.get(status) or fault.description or fault.name
    return (*_page(status, fault.name, sentence), headers)


def _foreign_host(fault: SecurityError) -> Response:
    """Asked under another name than this machine's: no page, for no address can be built for that name."""
    return Response(
        "This site answers on this machine only, under localhost or 127.0.0.1.\n", 400, mimetype="text/plain"
    )


def _busy(fault: RegistryBusy) -> tuple[str, int]:
    sentence = str(fault)
    sentence = sentence[:1].upper() + sentence[1:]
    if request.method == "POST":
        sentence += " Your browser's way back leads to what you typed."
    return _page(503, "The registry is busy", sentence)


def _refused(fault: PlutonbookError) -> tuple[str, int]:
    sentence = str(fault)
    sentence = sentence[:1].upper() + sentence[1:]
    if isinstance(fault, NotFound):
        return _page(404, "Not found", sentence)
    return _page(400, "This could not be done" if request.method == "POST" else "This could not be shown", sentence)


def _unexpected(fault: Exception) -> tuple[str, int]:
    return _page(
        500,
        "Something went wrong",
        "The page could not be made because of a fault in the program, not in your data. The terminal that serves "
        "this site holds the details.",
    )


def register(app: Flask) -> None:
    """Answer every error in the site's own words."""
    app.register_error_handler(Missing, _missing)
    app.register_error_handler(SecurityError, _foreign_host)
    app.register_error_handler(HTTPException, _http)
    app.register_error_handler(RegistryBusy, _busy)
    app.register_error_handler(PlutonbookError, _refused)
    app.register_error_handler(500, _unexpected)
