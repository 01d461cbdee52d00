"""``plutonbook methods``: every derived quantity with its source, and the check values computed anew."""

from __future__ import annotations

import click

from registry.commands.options import json_option, say


@click.command()
@click.option("--self-test", is_flag=True, help="Recompute every check value; exit 1 if one is off.")
@click.option("--markdown", is_flag=True, help="Print the table of quantities as README.md holds it.")
@json_option
def methods(self_test: bool, markdown: bool, as_json: bool) -> int:
    """List every derived quantity: name, unit, method, source, range, standard error, status."""
    if self_test:
        return _self_test(as_json)
    if markdown:
        from registry.methods_table import methods_table

        click.echo(methods_table())
        return 0
    from registry.petrology.catalogue import METHODS
    from registry.petrology.references import REFERENCES

    rows = [
        {
            "quantity": output.name,
            "unit": output.unit,
            "label": output.label,
            "method": method.label,
            "source": REFERENCES.get(method.source, method.source),
            "equation": method.equation,
            "range": "; ".join(
                f"{limits.column} {'' if limits.low is None else limits.low} to "
                f"{'' if limits.high is None else limits.high}"
                for limits in method.calibration
            )
            or "no range stated",
            "standard_error": method.standard_error,
            "status": method.status,
        }
        for method in METHODS
        for output in method.outputs
    ]
    lines = [
        f"{row['quantity']} [{row['unit']}]  {row['method']}; {row['source']}, {row['equation']}; "
        f"range {row['range']}; error {row['standard_error']}; {row['status']}"
        for row in rows
    ]
    say({"quantities": rows}, lines, as_json)
    return 0


def _self_test(as_json: bool) -> int:
    from dataclasses import asdict

    from registry.petrology.selftest import run_selftest

    results = run_selftest()
    failed = [result for result in results if not result.passed]
    lines = [result.sentence() for result in results]
    lines.append(f"{len(results) - len(failed):,} of {len(results):,} check values agree.")
    say({"results": [asdict(result) for result in results]}, lines, as_json)
    return 1 if failed else 0
