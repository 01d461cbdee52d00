"""Reading queries behind the site: SQL only, query-only connections, plain dictionaries and dataclasses out."""
