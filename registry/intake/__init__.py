"""From the bytes of a lab file or a master-data file to a checked table and a list of problems; no database."""
