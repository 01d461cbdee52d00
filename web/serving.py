"""Serving the site with waitress."""

from __future__ import annotations

from collections.abc import Callable

from waitress.server import create_server

from web import create_app

THREADS = 8
LOOPBACK = ("127.0.0.1", "localhost", "::1")


def serve(registry: str, host: str, port: int, announce: Callable[[str], object]) -> None:
    """Serve the site of a registry until it is stopped; ``announce`` gets the address once it listens.

    ``port`` 0 takes a free one. OSError where the port cannot be used.
    """
    app = create_app(registry, writable=host in LOOPBACK)
    if host in LOOPBACK:
        # a page of another site whose name was pointed at this machine is refused
        app.config["TRUSTED_HOSTS"] = ["localhost", "127.0.0.1", "[::1]"]
    server = create_server(app, host=host, port=port, threads=THREADS, ident=None)
    announce(f"http://{server.effective_host}:{server.effective_port}/")  # type: ignore[attr-defined]
    try:
        server.run()
    except KeyboardInterrupt:
        pass
    finally:
        server.close()
