"""Importing: files are sent, shown as they were understood, corrected, and stored in the background."""

from __future__ import annotations

from pathlib import Path
from typing import Any

from flask import Blueprint, Flask, abort, jsonify, redirect, render_template, request, send_file, url_for
from werkzeug.datastructures import FileStorage

from registry import import_jobs, reading_recipes
from registry.batching import DIGESTION_NAMES
from registry.errors import PlutonbookError
from registry.import_drafts import Draft, DraftFile, create_draft
from registry.intake_choices import ANALYTE_NAMES, KIND_NAMES, UNIT_NAMES
from registry.job_folder import DONE
from registry.store.reading import batches as batches_reading
from registry.store.reading import targets as targets_reading
from registry.store.reading.session import query_only
from web import import_form, working, writing
from web.errors import Missing

blueprint = Blueprint("importing", __name__)
LARGEST_UPLOAD_BYTES = 200 * 1024 * 1024
#: A quick import is shown as done at once; a longer one shows its progress.
PATIENCE_S = 1.5
MOST_FILES = 50
STATE_WORDS = {**working.STATE_WORDS, "done": "stored"}


def register(app: Flask) -> None:
    """Add the pages, and take as much as a lab file may be."""
    app.config["MAX_CONTENT_LENGTH"] = LARGEST_UPLOAD_BYTES
    # a table of 2,000 columns has some 12,000 fields
    app.config["MAX_FORM_PARTS"] = 50_000
    app.config["MAX_FORM_MEMORY_SIZE"] = 8 * 1024 * 1024
    app.jinja_env.filters["heading_words"] = import_form.heading_words
    app.jinja_env.filters["page_words"] = import_form.page_words
    app.jinja_env.filters["grouped_problems"] = import_form.grouped_problems
    app.jinja_env.filters["precedence_words"] = import_form.precedence_words
    app.jinja_env.globals["state_words"] = lambda state: STATE_WORDS[state]
    app.register_blueprint(blueprint)


def _found(draft_id: str) -> Draft:
    writing.require()
    draft = working.jobs().find(draft_id)
    if not isinstance(draft, Draft):
        raise Missing("import", draft_id, [("Import", url_for("importing.start"))])
    return draft


@blueprint.get("/import")
def start() -> Any:
    jobs = working.jobs()
    saved = reading_recipes.list_recipes(jobs.registry)
    drafts = [job for job in jobs.all() if isinstance(job, Draft)] if writing.standing().writable else []
    return render_template(
        "import.html", section="Import", drafts=drafts, saved=saved, limit=LARGEST_UPLOAD_BYTES, kinds=KIND_NAMES
    )


@blueprint.post("/import")
def send() -> Any:
    sent = [file for file in request.files.getlist("files") if file.filename]
    if not sent:
        abort(400, "No file was chosen. Go back, choose at least one and send it again.")
    if len(sent) > MOST_FILES:
        abort(400, f"At most {MOST_FILES} files are taken at once; {len(sent)} were sent.")
    jobs = working.jobs()
    draft = create_draft(jobs.folder, [(file.filename or "", _writer(file)) for file in sent])
    kind = request.form.get("kind")
    for file in draft.files:
        file.kind = kind if kind in KIND_NAMES else None
    import_jobs.look(jobs, draft)
    return _shown_soon(draft)


def _writer(file: FileStorage) -> Any:
    return lambda path: file.save(path)


def _shown_soon(draft: Draft) -> Any:
    working.jobs().wait(draft.draft_id, PATIENCE_S)
    return redirect(url_for("importing.page", draft_id=draft.draft_id), 303)


@blueprint.post("/import/readings")
def forget() -> Any:
    reading_recipes.forget_recipe(working.jobs().registry, request.form.get("name", ""))
    return redirect(url_for("importing.start"), 303)


@blueprint.get("/import/<draft_id>")
def page(draft_id: str) -> Any:
    return _page(_found(draft_id))


def _page(draft: Draft, notice: str = "", fault: str = "") -> Any:
    jobs = working.jobs()
    names, batches = {}, []
    with query_only(jobs.registry) as connection:
        if not draft.under_way:
            names = targets_reading.target_names(connection)
        if not draft.under_way and draft.state != DONE:
            batches = [row for row in batches_reading.batch_list(connection) if row["state"] == "active"]
    ended = draft.under_way or draft.state == DONE
    files = [] if ended else [_file_view(draft, number) for number in range(len(draft.files))]
    return render_template(
        "import_draft.html",
        section="Import",
        draft=draft,
        sentence=jobs.sentence_of(draft),
        files=files,
        others=import_form.other_problems(draft),
        target_names=names,
        batches=batches,
        notice=notice,
        fault=fault,
        kinds=KIND_NAMES,
        units=UNIT_NAMES,
        analytes=ANALYTE_NAMES,
        digestions=DIGESTION_NAMES,
        separators=import_form.SEPARATORS,
        decimals=import_form.DECIMALS,
        thousands=import_form.THOUSANDS_WORDS,
        dips=import_form.DIPS,
    )


def _file_view(draft: Draft, number: int) -> dict[str, Any]:
    file = draft.files[number]
    recipe = import_form.current_recipe(file)
    tables = []
    for table, looked in enumerate(file.looked):
        own = import_form.current_recipe(file, table)
        tables.append(
            {
                "key": import_form.table_key(number, table),
                "looked": looked,
                "columns": import_form.shown_columns(file, table),
                "unread": import_form.spare_columns(file, table),
                "proposed": reading_recipes.proposed_names(working.jobs().registry, own.shape),
            }
        )
    kinds = {looked["kind"] for looked in file.looked}
    return {
        "number": number,
        "file": file,
        "tables": tables,
        "kind": kinds.pop() if len(kinds) == 1 else None,
        "kinds": kinds,
        "ok": all(looked["ok"] for looked in file.looked) and bool(file.looked),
        "problems": import_form.problems_of(draft, file, "problem"),
        "warnings": import_form.problems_of(draft, file, "warning"),
        "code": import_form.code_column(file),
        "headings": _headings(file, recipe.shape),
        "recipe": recipe,
        "thousands": import_form.thousands_name(recipe),
    }


def _headings(file: DraftFile, shape: tuple[str, ...]) -> list[str]:
    """The columns that can hold the sample codes: those with a heading, then those without one that hold anything."""
    of_long_table = [heading for looked in file.looked for heading in looked.get("code_headings", ())]
    without = [header for looked in file.looked for header in looked["ignored"] if header.startswith("#")]
    return [heading for heading in dict.fromkeys(of_long_table or [*shape, *without]) if heading]


@blueprint.post("/import/<draft_id>")
def change(draft_id: str) -> Any:
    draft = _found(draft_id)
    jobs, form = working.jobs(), request.form
    action, _, argument = form.get("do", "read").partition(":")
    if draft.under_way or draft.state == DONE:
        return redirect(url_for("importing.page", draft_id=draft_id), 303)
    if action == "drop":
        jobs.folder.delete(draft_id)
        return redirect(url_for("importing.start"), 303)
    changed = import_form.take_options(draft, form)
    for number, file in enumerate(draft.files):
        changed |= import_form.take_choices(file, number, form)
    if action == "save":
        return _save_reading(draft, argument)
    if action in ("use", "plain"):
        _use_reading(draft, argument, action == "use")
    elif action == "store" and not changed:
        import_jobs.store(jobs, draft)
        return _shown_soon(draft)
    import_jobs.look(jobs, draft)
    return _shown_soon(draft)


def _place(draft: Draft, text: str) -> tuple[DraftFile, int]:
    """The file and the number of its table that a button of the form names."""
    number, _, table = text.partition(".")
    if number.isdecimal() and int(number) < len(draft.files) and (table or "0").isdecimal():
        file = draft.files[int(number)]
        if int(table or 0) < len(file.looked):
            return file, int(table or 0)
    abort(400, "The form names a file that is not part of this import.")


def _use_reading(draft: Draft, argument: str, use: bool) -> None:
    """Read a file with the saved reading chosen in its form, or without any."""
    file, _ = _place(draft, argument)
    name = request.form.get(f"saved-{argument}") if use else None
    file.read_with(None if name is None else reading_recipes.find_recipe(working.jobs().registry, name), name)


def _save_reading(draft: Draft, argument: str) -> Any:
    """Keep the reading of one table under a name; what was changed in it is read again, so that it is seen."""
    file, table = _place(draft, argument)
    name = " ".join(request.form.get(f"name-{argument}", "").split())
    jobs = working.jobs()
    try:
        replaced = reading_recipes.save_recipe(jobs.registry, name, import_form.current_recipe(file, table))
    except PlutonbookError as fault:
        return _page(draft, fault=str(fault)), 400
    file.recipe_name = name
    import_jobs.look(jobs, draft)
    jobs.wait(draft.draft_id, PATIENCE_S)
    draft = _found(draft.draft_id)
    if draft.under_way:
        return redirect(url_for("importing.page", draft_id=draft.draft_id), 303)
    said = "was replaced" if replaced else "is saved"
    return _page(draft, notice=f"The reading “{name}” {said}; a file with the same headings will propose it.")


@blueprint.get("/import/<draft_id>/refused/<number>")
def refused_rows(draft_id: str, number: str) -> Any:
    """The rows of one file that were not stored, with the reasons; corrected, they can be imported again."""
    draft = _found(draft_id)
    files = (draft.report or {}).get("files", [])
    known = number.isdecimal() and int(number) < len(files)
    path = Path((files[int(number)]["refused_file"] if known else None) or "")
    if not path.is_file() or not path.resolve().is_relative_to(
        (working.jobs().folder.place / draft.draft_id).resolve()
    ):
        raise Missing("file of refused rows", draft_id)
    return send_file(path.resolve(), mimetype="text/csv", as_attachment=True, download_name=path.name)


@blueprint.get("/import/<draft_id>/state.json")
def state(draft_id: str) -> Any:
    if not writing.standing().writable:
        return jsonify(error="Imports are shown to whoever may make them."), 403
    draft = working.jobs().find(draft_id)
    if not isinstance(draft, Draft):
        return jsonify(error=f"There is no import {draft_id}."), 404
    return working.state_of(draft)
