"""The history of the schema: one numbered revision a file, run by Alembic on SQLite and PostgreSQL."""
