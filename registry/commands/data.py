"""``plutonbook import``, ``refresh`` and ``export``."""

from __future__ import annotations

from pathlib import Path
from typing import Any

import click

from registry.commands.options import json_option, registry_named, registry_option, say
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
@json_option
def import_(registry_path: str | None, files: tuple[Path, ...], as_json: bool, **options: Any) -> None:
    """Import areas, sites, surveys, intervals, intrusions, samples and lab results from FILES.

    All problems of all files are listed at once, and nothing is written if there is one.
    """
    from registry.importing import ImportOptions, import_files
    from registry.store.engine import open_registry

    chosen = ImportOptions(**options)
    if chosen.supersede and chosen.add_to:
        raise UsageError("--supersede and --add-to exclude each other: a file replaces a certificate or adds to it")
    report = import_files(open_registry(registry_named(registry_path)), list(files), chosen)
    say(report.as_dict(), report.lines(), as_json)


@click.command()
@registry_option
@click.option("--all", "everything", is_flag=True, help="Recompute every sample, not only the stale ones.")
@click.option("--probability", is_flag=True, help="Also draw the probability that each verdict survives error.")
@json_option
def refresh(registry_path: str | None, everything: bool, probability: bool, as_json: bool) -> None:
    """Recompute what is stale, or everything."""
    from registry.refresh import refresh_registry
    from registry.store.engine import open_registry

    if probability:
        raise UsageError(
            "--probability is not there yet: probability_state stands at 'not_computed'; run refresh without it"
        )
    count = refresh_registry(open_registry(registry_named(registry_path)), everything)
    say({"recomputed": count}, [f"Recomputed {count:,} {'sample' if count == 1 else 'samples'}."], as_json)


@click.command()
@click.argument("sheet")
@registry_option
@click.option("--to", "target", required=True, type=click.Path(path_type=Path), help="The file to write (.csv).")
@click.option("--where", multiple=True, metavar='"COLUMN OP VALUE"', help="Only such rows; may be given many times.")
@json_option
def export(registry_path: str | None, sheet: str, target: Path, where: tuple[str, ...], as_json: bool) -> None:
    """Write the view SHEET (sample_sheet, verdict_sheet, ...) to a file."""
    from registry.exporting import export_sheet
    from registry.store.engine import open_registry

    count = export_sheet(open_registry(registry_named(registry_path)), sheet, target, where)
    say({"rows": count, "file": str(target)}, [f"Wrote {count:,} rows of {sheet} to {target}."], as_json)
