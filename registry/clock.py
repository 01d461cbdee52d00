"""The time, as the registry writes it."""

from __future__ import annotations

from datetime import UTC, datetime


def now() -> str:
    """UTC in ISO 8601 with Z, whole seconds."""
    return datetime.now(UTC).strftime("%Y-%m-%dT%H:%M:%SZ")
