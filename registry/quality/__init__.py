"""Reference materials, blanks, duplicates and precision; no database."""
