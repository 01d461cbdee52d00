"""Criteria and verdicts: the definitions are TOML data, the engine judges whole batches of arrays."""
