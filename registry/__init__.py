"""Plutonbook: a register of drill and outcrop samples and of what each rock was as a magma."""
