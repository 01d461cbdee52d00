"""Tables, sessions, bulk writes, views, triggers and reading: the only place that opens or commits a transaction."""
