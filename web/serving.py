"""Serving the site with waitress."""

from __future__ import annotations

from collections.abc import Callable, Iterable
from typing import Any

from waitress.server import create_server

from web import create_app

THREADS = 8
LOOPBACK = ("127.0.0.1", "localhost", "::1")


def serve(
    registry: str, host: str, port: int, announce: Callable[[str], object], https_name: str | None = None
) -> None:
    """Serve the site of a registry until it is stopped; ``announce`` gets the address once it listens.

    ``port`` 0 takes a free one. ``https_name``: a proxy gives the site https under that name, to others than this
    machine; its cookies are for https alone. OSError where the port cannot be used.
    """
    app = create_app(registry, writable=host in LOOPBACK and https_name is None, https=https_name is not None)
    served: Any = app
    trusted: dict[str, Any] = {}
    if https_name is not None:
        served = _under(https_name, app)
        if host in LOOPBACK:  # only a proxy of this machine can ask: it tells who asked it
            trusted = {"trusted_proxy": "*", "trusted_proxy_headers": {"x-forwarded-for"}}
    elif host in LOOPBACK:
        # a page of another site whose name was pointed at this machine is refused
        app.config["TRUSTED_HOSTS"] = ["localhost", "127.0.0.1", "[::1]"]
    server = create_server(
        served, host=host, port=port, threads=THREADS, ident=None, clear_untrusted_proxy_headers=True, **trusted
    )
    announce(f"http://{server.effective_host}:{server.effective_port}/")  # type: ignore[attr-defined]
    try:
        server.run()
    except KeyboardInterrupt:
        pass
    finally:
        server.close()


def _under(name: str, app: Callable[..., Iterable[bytes]]) -> Callable[..., Iterable[bytes]]:
    """The application as it is asked through the proxy, whatever name and scheme the proxy itself asks with."""

    def asked(environ: dict[str, Any], start_response: Any) -> Iterable[bytes]:
        return app({**environ, "HTTP_HOST": name, "wsgi.url_scheme": "https"}, start_response)

    return asked
