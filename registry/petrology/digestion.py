"""Digestions: what each one brings wholly, at least or not at all into solution (methods: common practice)."""
