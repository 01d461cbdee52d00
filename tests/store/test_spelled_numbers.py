"""Numbers within the texts of the warning sheet, on both engines: four significant digits, no exponent."""

from __future__ import annotations

import pytest

from registry.store import dialect_postgresql, dialect_sqlite
from registry.store.engine import Registry, reading


@pytest.mark.parametrize(
    ("number", "expected"),
    [
        ("734.19812", "734.2"), ("1154.71", "1155"), ("12346.0", "12350"), ("-200.0", "-200"), ("0.0", "0"),
        ("75.25", "75.25"), ("6.0625", "6.063"), ("0.21875", "0.2188"), ("-0.28125", "-0.2813"),
        ("0.000012341", "0.00001234"), ("892.0", "892"), ("1e15", "1000000000000000"),
    ],
)  # fmt: skip
def test_spelled_number_has_at_most_four_significant_digits(any_registry: Registry, number: str, expected: str) -> None:
    with reading(any_registry) as connection:
        dialect = dialect_sqlite if connection.dialect.name == "sqlite" else dialect_postgresql
        found = connection.exec_driver_sql(f"SELECT {dialect.spelled(number)}").scalar()

    assert found == expected


def test_spelled_number_that_is_missing_stays_missing(any_registry: Registry) -> None:
    with reading(any_registry) as connection:
        dialect = dialect_sqlite if connection.dialect.name == "sqlite" else dialect_postgresql
        found = connection.exec_driver_sql(f"SELECT {dialect.spelled(dialect.NULL_NUMBER)}").scalar()

    assert found is None
