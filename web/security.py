"""Headers that every answer carries: nothing comes from the network, nothing runs that is not ours."""

from __future__ import annotations

from flask import Flask, Response, abort, request

from web.writing import OPEN_ENDPOINTS

#: Start from nothing, add what a page needs. No inline script, no inline style, no frame, no foreign host.
CONTENT_SECURITY_POLICY = "; ".join(
    (
        "default-src 'none'",
        "script-src 'self'",
        "style-src 'self'",
        "img-src 'self' data:",
        "connect-src 'self'",
        "form-action 'self'",
        "base-uri 'none'",
        "frame-ancestors 'none'",
    )
)
HEADERS = {
    "Content-Security-Policy": CONTENT_SECURITY_POLICY,
    "X-Content-Type-Options": "nosniff",
    "X-Frame-Options": "DENY",
    "Referrer-Policy": "same-origin",
    "Cross-Origin-Opener-Policy": "same-origin",
    "Cross-Origin-Resource-Policy": "same-origin",
    "Permissions-Policy": "camera=(), geolocation=(), microphone=(), payment=(), usb=()",
}
#: Pages show the registry as it is now; only the files of ``static`` may be kept, and are asked for again.
NOT_KEPT = "private, no-cache"


def _add_headers(response: Response) -> Response:
    for name, value in HEADERS.items():
        response.headers[name] = value
    response.headers.setdefault("Cache-Control", NOT_KEPT)
    return response


def _refuse_nul() -> None:
    """No name in a registry holds the character NUL, and PostgreSQL takes no text that does."""
    if "\0" in request.path:
        abort(404)
    if request.method == "POST" and request.endpoint not in OPEN_ENDPOINTS:
        named = [name for name, text in request.form.items(multi=True) if "\0" in text]
        if named:
            abort(400, f"Nothing was changed: the field “{named[0]}” holds a character that cannot be typed (NUL).")


def protect(app: Flask) -> None:
    """Add the headers to every answer of ``app``, errors and files included; refuse what no registry can hold."""
    app.before_request(_refuse_nul)
    app.after_request(_add_headers)
