"""``plutonbook import``, ``refresh`` and ``export``."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

from registry.commands.options import json_option, registry_named, registry_option, say
from registry.commands.progress import shown
from registry.errors import UsageError

KINDS = ["areas", "sites", "surveys", "intervals", "intrusions", "samples", "results", "reference-materials"]


@click.command("import")
@click.argument("files", nargs=-1, required=True, type=click.Path(path_type=Path))
@registry_option
@click.option("--as", "kind", type=click.Choice(KINDS), help="What the files hold; told from the header if left out.")
@click.option("--dry-run", is_flag=True, help="Show what would happen, write nothing.")
@click.option("--batch", metavar="CODE", help="Code of the batch; else the certificate number or the file name.")
@click.option("--lab", metavar="NAME", help="The laboratory.")
@click.option("--create-samples", is_flag=True, help="Add unknown sample codes with the kind 'unknown'.")
@click.option("--keep-going", is_flag=True, help="Store the good rows, save the bad ones beside the input.")
@click.option("--supersede", is_flag=True, help="This is the corrected certificate: it replaces the earlier file.")
@click.option("--add-to", metavar="BATCH", help="Another file of this certificate: add its results to the batch.")
@click.option("--code-prefix", metavar="P", default="", help="Put P before every sample code of the files.")
@click.option("--recipe", metavar="NAME", help="Read the results as the saved reading NAME says.")
@click.option("--save-recipe", metavar="NAME", help="Keep this reading of the results under NAME for the next file.")
@click.option(
    "--column",
    "columns",
    multiple=True,
    metavar='"HEADING=WHAT"',
    help="What a column of results is; may be given many times. WHAT is an analyte, a unit, a digestion, any of them "
    "together ('Au=Au ppb fire assay'), after the word method a method, or else ignore, or sample code. '#7' in place "
    "of a heading is the seventh column. The last = parts the two.",
)
@click.option("--unit", metavar="UNIT", help="Unit of result columns that state none (wt%, ppm, ppb, ...).")
@click.option("--digestion", metavar="DIGESTION", help="Digestion of columns that tell none (four_acid, fusion, ...).")
@click.option("--decimal", type=click.Choice(["point", "comma"]), help="The decimal sign of the results.")
@click.option(
    "--thousands",
    type=click.Choice(["comma", "point", "space", "apostrophe", "none"]),
    help="The only sign that groups digits in results; with none, a number with such a sign is a fault.",
)
@click.option(
    "--separator", type=click.Choice(["comma", "semicolon", "tab", "bar"]), help="What parts the cells of a text file."
)
@click.option("--sheet", metavar="NAME", help="Read this sheet of a workbook or file of an archive only.")
@click.option("--negative-means-below", is_flag=True, help="A negative result -x means: below the limit x.")
@click.option(
    "--positive-dips", type=click.Choice(["down", "up"]), help="Where the dips of a survey without signs point."
)
@click.option("--verbose", is_flag=True, help="Tell every column and every remark one by one.")
@json_option
def import_(registry_path: str | None, files: tuple[Path, ...], as_json: bool, verbose: bool, **options: Any) -> None:
    """Import areas, sites, surveys, intervals, intrusions, samples and lab results from FILES.

    All problems of all files are listed at once, and nothing is written if there is one.
    """
    from registry.importing import FileChoice, ImportOptions, import_files
    from registry.reading_choices import Readings, reading_options
    from registry.store.engine import open_registry

    how = {name: options.pop(name) for name in _HOW_READ}
    chosen = ImportOptions(**options)
    if chosen.supersede and chosen.add_to:
        raise UsageError("--supersede and --add-to exclude each other: a file replaces a certificate or adds to it")
    if how["save_recipe"] and chosen.dry_run:
        raise UsageError("--save-recipe and --dry-run exclude each other: a dry run writes nothing")
    registry = open_registry(registry_named(registry_path))
    readings = Readings(registry, how["recipe"], how["save_recipe"])
    choice = FileChoice(reading=reading_options(readings.recipe, **{name: how[name] for name in _HOW_READ[2:]}))
    choices = dict.fromkeys(files, choice)
    with shown(files, chosen.dry_run) as progress:
        report = import_files(
            registry, list(files), chosen, choices=choices, progress=progress, tell=progress.tell, on_read=readings.take
        )
    saved = readings.save()
    say({**report.as_dict(), "saved_recipe": how["save_recipe"]}, [*report.lines(verbose), *saved], as_json)


#: The options that say how files are read; the others say how they are stored.
_HOW_READ = (
    "recipe", "save_recipe", "unit", "digestion", "negative_means_below", "positive_dips", "columns", "decimal",
    "thousands", "separator", "sheet",
)  # fmt: skip


@click.command()
@registry_option
@click.option("--all", "everything", is_flag=True, help="Recompute every sample, not only the stale ones.")
@click.option("--probability", is_flag=True, help="Also draw the probability that each verdict survives error.")
@click.option(
    "--intrusion",
    "intrusions",
    metavar="NAME",
    multiple=True,
    help="With --probability: draw for the samples of this intrusion only; may be given many times.",
)
@json_option
def refresh(
    registry_path: str | None, everything: bool, probability: bool, intrusions: tuple[str, ...], as_json: bool
) -> None:
    """Recompute what is stale, or everything.

    With --probability the analysis of every sample is then drawn many times within analytical error, and judged anew:
    the share of draws that give a verdict again is the chance that it survives analytical error, not the chance of
    ore. Verdicts that have one are not drawn again; an interrupted run goes on where it stopped.
    """
    from registry.refresh import refresh_registry
    from registry.store.engine import open_registry
    from registry.surviving import draw_probabilities

    if intrusions and not probability:
        raise UsageError("--intrusion limits what --probability draws; give both, or neither")
    registry = open_registry(registry_named(registry_path))
    with shown() as progress:
        count = refresh_registry(registry, everything, progress=progress)
        drawn = draw_probabilities(registry, intrusions, progress, progress.tell) if probability else 0
    lines = [f"Recomputed {count:,} {'sample' if count == 1 else 'samples'}."]
    if probability:
        lines.append(
            f"Drew probabilities for {drawn:,} {'sample' if drawn == 1 else 'samples'}: how often a verdict survives "
            "analytical error, not the chance of ore. Those drawn stand in verdict_sheet.probability and beside the "
            "verdicts on the sample pages."
        )
    say({"recomputed": count, **({"drawn": drawn} if probability else {})}, lines, as_json)


@click.command()
@click.argument("sheet")
@registry_option
@click.option(
    "--to",
    "target",
    required=True,
    type=click.Path(path_type=Path),
    help="The file to write: .csv .xlsx .parquet .geojson .gpkg.",
)
@click.option("--where", multiple=True, metavar='"COLUMN OP VALUE"', help="Only such rows; may be given many times.")
@json_option
def export(registry_path: str | None, sheet: str, target: Path, where: tuple[str, ...], as_json: bool) -> None:
    """Write the view SHEET (sample_sheet, verdict_sheet, ...) to a file."""
    from registry.exporting import export_sheet, why_nothing
    from registry.store.engine import open_registry

    registry = open_registry(registry_named(registry_path))
    count = export_sheet(registry, sheet, target, where)
    lines = [f"Wrote {count:,} rows of {sheet} to {target}."]
    if not count:
        lines.append(why_nothing(registry, sheet, where))
    say({"rows": count, "file": str(target), "remarks": lines[1:]}, lines, as_json)
