"""From the bytes of a lab file or a master-data file to a checked table and a list of problems; no database."""

from registry.intake.reading import read_all, read_file, read_path
from registry.intake.readings import KINDS, MasterTable, Reading, ReadingOptions, ResultColumn, ResultTable
from registry.intake.recipes import ColumnChoice, Recipe

__all__ = [
    "KINDS",
    "ColumnChoice",
    "MasterTable",
    "Reading",
    "ReadingOptions",
    "Recipe",
    "ResultColumn",
    "ResultTable",
    "read_all",
    "read_file",
    "read_path",
]
