"""Serving the site with waitress."""

from __future__ import annotations

from collections.abc import Callable

from waitress.server import create_server

from web import create_app

THREADS = 8


def serve(registry: str, host: str, port: int, announce: Callable[[str], object]) -> None:
    """Serve the site of a registry until it is stopped; ``announce`` gets the address once it listens.

    ``port`` 0 takes a free one. OSError where the port cannot be used.
    """
    server = create_server(create_app(registry), host=host, port=port, threads=THREADS, ident=None)
    announce(f"http://{server.effective_host}:{server.effective_port}/")  # type: ignore[attr-defined]
    try:
        server.run()
    except KeyboardInterrupt:
        pass
    finally:
        server.close()
