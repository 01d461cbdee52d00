"""Batches superseded, added to, withdrawn and restored in odd orders. The data are invented: branches of the rules."""

from __future__ import annotations

import random
import re
from pathlib import Path
from typing import Any

import pytest

from registry.batching import list_batches, set_state
from registry.errors import InputProblems, PlutonbookError
from registry.importing import ImportOptions, import_files
from registry.refresh import refresh_registry
from registry.store import integrity
from registry.store.engine import Registry, reading

MAJORS = "Sample,SiO2 (%) XRF,Zr fusion (ppm)\nR1,60,{zr}\n"
TRACES = "Sample,Cu fusion (ppm)\nR1,{cu}\n"
EVERYTHING = ("composition_sheet", "index_sheet", "melt_sheet", "verdict_sheet", "control_sheet", "change_sheet",
              "intrusion_sheet", "suite_sheet", "warning_sheet")  # fmt: skip


def bring(registry: Registry, folder: Path, name: str, text: str, **options: Any) -> str:
    """Import a text; the code of its batch."""
    (folder / name).write_text(text)
    report = import_files(registry, [folder / name], ImportOptions(create_samples=True, **options))
    assert report.files[0].results is not None
    return report.files[0].results.batch


def states(registry: Registry) -> dict[str, str]:
    return {row["batch"]: row["state"] for row in list_batches(registry)}


def chosen(registry: Registry) -> tuple[Any, ...]:
    with reading(registry) as connection:
        return tuple(connection.exec_driver_sql("SELECT zr_ppm, cu_ppm FROM composition_sheet").one())


def everything(registry: Registry) -> dict[str, list[Any]]:
    with reading(registry) as connection:
        return {
            sheet: sorted(map(repr, connection.exec_driver_sql(f"SELECT * FROM {sheet}").all())) for sheet in EVERYTHING
        }


def is_sound(registry: Registry) -> None:
    """What ``check`` looks at is in order, and to compute everything anew changes nothing."""
    with reading(registry) as connection:
        assert integrity.findings(connection) == []
    before = everything(registry)
    refresh_registry(registry, everything=True)
    assert everything(registry) == before


def test_corrected_certificate_is_not_restored_beside_the_one_that_took_its_place(
    any_registry: Registry, tmp_path: Path
) -> None:
    bring(any_registry, tmp_path, "K1.csv", MAJORS.format(zr=100))
    bring(any_registry, tmp_path, "b.csv", MAJORS.format(zr=200), batch="K1", supersede=True)
    set_state(any_registry, "K1 corrected 2", "withdrawn")
    set_state(any_registry, "K1", "active")
    with pytest.raises(PlutonbookError, match="in its place 'K1' counts; withdraw 'K1' first"):
        set_state(any_registry, "K1 corrected 2", "active")
    set_state(any_registry, "K1", "withdrawn")
    set_state(any_registry, "K1 corrected 2", "active")
    with pytest.raises(PlutonbookError, match="in its place 'K1 corrected 2' counts; withdraw 'K1 corrected 2' first"):
        set_state(any_registry, "K1", "active")
    assert states(any_registry) == {"K1": "withdrawn", "K1 corrected 2": "active"}
    assert chosen(any_registry) == (200.0, None)
    is_sound(any_registry)


def test_first_of_three_certificates_is_restored_once_the_last_is_withdrawn(
    founded_registry: Registry, tmp_path: Path
) -> None:
    bring(founded_registry, tmp_path, "K1.csv", MAJORS.format(zr=100))
    for name, zr in (("b.csv", 200), ("c.csv", 300)):
        bring(founded_registry, tmp_path, name, MAJORS.format(zr=zr), batch="K1", supersede=True)
    with pytest.raises(PlutonbookError, match="in its place 'K1 corrected 3' counts"):
        set_state(founded_registry, "K1", "active")
    with pytest.raises(PlutonbookError, match="'K1 corrected 2' was superseded by 'K1 corrected 3' and counts nowhere"):
        set_state(founded_registry, "K1 corrected 2", "withdrawn")
    set_state(founded_registry, "K1 corrected 3", "withdrawn")
    set_state(founded_registry, "K1", "active")
    for code in ("K1 corrected 2", "K1 corrected 3"):
        with pytest.raises(PlutonbookError, match="in its place 'K1' counts; withdraw 'K1' first"):
            set_state(founded_registry, code, "active")
    assert chosen(founded_registry) == (100.0, None)
    is_sound(founded_registry)


def test_certificate_that_is_corrected_again_after_its_correction_was_withdrawn_counts_once(
    founded_registry: Registry, tmp_path: Path
) -> None:
    bring(founded_registry, tmp_path, "K1.csv", MAJORS.format(zr=100))
    bring(founded_registry, tmp_path, "b.csv", MAJORS.format(zr=200), batch="K1", supersede=True)
    set_state(founded_registry, "K1 corrected 2", "withdrawn")
    set_state(founded_registry, "K1", "active")
    set_state(founded_registry, "K1", "withdrawn")
    set_state(founded_registry, "K1 corrected 2", "active")
    third = bring(founded_registry, tmp_path, "c.csv", MAJORS.format(zr=300), batch="K1", supersede=True)
    assert states(founded_registry) == {"K1": "withdrawn", "K1 corrected 2": "superseded", third: "active"}
    with pytest.raises(PlutonbookError, match="in its place 'K1 corrected 3' counts"):
        set_state(founded_registry, "K1", "active")
    is_sound(founded_registry)


def test_superseded_part_stays_so_while_its_certificate_is_withdrawn_and_restored(
    any_registry: Registry, tmp_path: Path
) -> None:
    bring(any_registry, tmp_path, "K1.csv", MAJORS.format(zr=100))
    bring(any_registry, tmp_path, "t.csv", TRACES.format(cu=55), add_to="K1")
    bring(any_registry, tmp_path, "u.csv", TRACES.format(cu=66), batch="K1/2", supersede=True)
    report = set_state(any_registry, "K1", "withdrawn")
    assert report["parts"] == ["K1/2 corrected 2"]
    assert states(any_registry) == {"K1": "withdrawn", "K1/2": "superseded", "K1/2 corrected 2": "withdrawn"}
    assert chosen(any_registry) == (None, None)
    set_state(any_registry, "K1", "active")
    assert states(any_registry) == {"K1": "active", "K1/2": "superseded", "K1/2 corrected 2": "active"}
    assert chosen(any_registry) == (100.0, 66.0)
    is_sound(any_registry)


CERTIFICATE = "Certificate,Z-77\n\n"


def test_right_file_of_a_withdrawn_certificate_goes_in_under_another_code(
    founded_registry: Registry, tmp_path: Path
) -> None:
    """As the README says: withdraw, then import the right file under another --batch."""
    assert bring(founded_registry, tmp_path, "a.csv", CERTIFICATE + MAJORS.format(zr=100)) == "Z-77"
    with pytest.raises(InputProblems, match="certificate 'Z-77' is in the registry already") as refused:
        bring(founded_registry, tmp_path, "b.csv", CERTIFICATE + MAJORS.format(zr=200), batch="Y-1")
    assert "--supersede" in str(refused.value) and "--add-to Z-77" in str(refused.value)
    assert "--batch" not in str(refused.value)  # another code does not make it another certificate
    set_state(founded_registry, "Z-77", "withdrawn")
    with pytest.raises(InputProblems, match=r"as batch 'Z-77', which is withdrawn.*--supersede.*code of its own"):
        bring(founded_registry, tmp_path, "b.csv", CERTIFICATE + MAJORS.format(zr=200))
    assert bring(founded_registry, tmp_path, "b.csv", CERTIFICATE + MAJORS.format(zr=200), batch="Y-1") == "Y-1"
    assert chosen(founded_registry) == (200.0, None)
    is_sound(founded_registry)


def test_refusals_of_a_superseded_certificate_name_the_batch_that_counts(
    founded_registry: Registry, tmp_path: Path
) -> None:
    first = CERTIFICATE + MAJORS.format(zr=100)
    bring(founded_registry, tmp_path, "a.csv", first)
    bring(founded_registry, tmp_path, "b.csv", CERTIFICATE + MAJORS.format(zr=200), supersede=True)
    with pytest.raises(InputProblems, match="--add-to 'Z-77 corrected 2'"):
        bring(founded_registry, tmp_path, "c.csv", CERTIFICATE + MAJORS.format(zr=300))
    with pytest.raises(InputProblems, match="'Z-77', which is superseded; 'Z-77 corrected 2' counts in its place"):
        bring(founded_registry, tmp_path, "c.csv", CERTIFICATE + MAJORS.format(zr=300), add_to="Z-77")
    with pytest.raises(InputProblems, match=r"'Z-77' \(superseded\); 'Z-77 corrected 2' counts in its place"):
        bring(founded_registry, tmp_path, "a.csv", first)


@pytest.mark.parametrize("seed", range(6))
def test_random_sequence_of_changes_leaves_a_sound_registry(
    founded_registry: Registry, tmp_path: Path, seed: int
) -> None:
    """Of one certificate and its corrections never two count; a dry run tells what the change then does."""
    chance = random.Random(seed)
    bring(founded_registry, tmp_path, "K1.csv", MAJORS.format(zr=100))
    for step in range(14):
        known = states(founded_registry)
        code = chance.choice(sorted(known))
        act = chance.choice(["withdrawn", "active", "supersede", "add_to"])
        text = (MAJORS if chance.random() < 0.5 else TRACES).format(zr=step + 1, cu=step + 1)
        options: dict[str, Any] = {"batch": code, "supersede": True} if act == "supersede" else {"add_to": code}
        try:
            if act in ("withdrawn", "active"):
                trial = set_state(founded_registry, code, act, dry_run=True)
                assert set_state(founded_registry, code, act)["recomputed"] == trial["recomputed"]
            else:
                bring(founded_registry, tmp_path, f"{step}.csv", text, dry_run=True, **options)
                assert states(founded_registry) == known
                bring(founded_registry, tmp_path, f"{step}.csv", text, **options)
        except PlutonbookError as refusal:
            assert states(founded_registry) == known, refusal
        active = [name for name, state in states(founded_registry).items() if state == "active"]
        counting = [re.sub(r"( corrected \d+)+$", "", name) for name in active]
        assert len(counting) == len(set(counting))
    is_sound(founded_registry)
