"""Published whole-rock petrology as functions of numpy arrays; no files, no database, no web."""
