"""A site that may write, over a registry of three invented samples, and the forms as a person sends them."""

from __future__ import annotations

import io
import re
import shutil
from html import unescape
from pathlib import Path
from tempfile import TemporaryDirectory
from typing import Any

from flask.testing import FlaskClient
from werkzeug.datastructures import MultiDict

from registry.founding import found
from registry.importing import import_files
from registry.store.engine import Registry
from web import create_app

#: Invented: a layout test.
SAMPLES = "sample_code,sample_kind,lithology\nKD-1,core,granite\nKD-2,core,granite\nKD-3,core,granite\n"
MAJORS = (
    "Sample,SiO2 XRF (%),Al2O3 XRF (%),Fe2O3T XRF (%),MgO XRF (%),CaO XRF (%),Na2O XRF (%),K2O XRF (%)\n"
    "KD-1,72.1,14.0,1.8,0.4,1.1,3.4,4.9\nKD-2,71.3,14.2,2.1,0.5,1.3,3.4,4.7\nKD-3,70.2,14.4,2.5,0.7,1.8,3.5,4.4\n"
)
TRACES = "Certificate: T-77\nSample,Zr,Sr (ppm),Au\nKD-1,150,400,<1\nKD-2,160,380,5\n"
FAULTY = "Sample,SiO2 (%),MnO (%)\nKD-1,65.1,3002\nKD-2,sixty,0.1\n"


def small_registry(path: Path) -> Registry:
    """A registry of the three samples and their majors; the files lie beside it meanwhile."""
    registry = found(path)
    with TemporaryDirectory(dir=path.parent) as folder:
        samples, majors = Path(folder, "samples.csv"), Path(folder, "majors.csv")
        samples.write_text(SAMPLES)
        majors.write_text(MAJORS)
        import_files(registry, [samples, majors])
    return registry


class Site:
    """A client of the writable site; ``send`` and ``press`` fill the forms from what the pages hold."""

    def __init__(self, small_registry_file: Path, folder: Path) -> None:
        self.path = Path(shutil.copy(small_registry_file, folder / "site.sqlite"))
        self.app = create_app(str(self.path), writable=True, drafts=folder / "drafts")
        self.client: FlaskClient = self.app.test_client()

    def close(self) -> None:
        self.app.extensions["registry"].close()

    @property
    def jobs(self) -> Any:
        return self.app.extensions["jobs"]

    def token(self) -> str:
        return self.field(self.client.get("/import").text, "csrf_token")

    @staticmethod
    def field(page: str, name: str) -> str:
        found = re.search(rf'name="{name}"[^>]*value="([^"]*)"', page)
        assert found is not None, f"no field {name}"
        return unescape(found[1])

    def send(self, *files: tuple[str, str | bytes], **fields: str) -> str:
        """Send files as (name, content) and wait until they are read; the address of their page."""
        parts = [
            (io.BytesIO(content if isinstance(content, bytes) else content.encode()), name) for name, content in files
        ]
        answer = self.client.post("/import", data={"csrf_token": self.token(), "files": parts, **fields})
        assert answer.status_code == 303, answer.text
        return self.settled(answer.headers["Location"])

    def settled(self, address: str) -> str:
        draft = self.jobs.wait(address.rsplit("/", 1)[-1], 300)  # ends as soon as the work does
        assert draft is not None and not draft.under_way, draft
        return address

    def form(self, address: str) -> MultiDict[str, str]:
        """Every field of the form on a page as a browser would send it."""
        return form_fields(self.client.get(address).text)

    def press(self, address: str, button: str, **changes: str) -> Any:
        """Press a button of the form with some fields changed; the answer, after the work it started is through."""
        form = self.form(address)
        for name, value in changes.items():
            form.setlist(name.replace("__", "-"), [value])
        form.setlist("do", [button])
        answer = self.client.post(address, data=form)
        if answer.status_code == 303 and answer.headers["Location"].startswith("/import/"):
            self.settled(answer.headers["Location"])
        return answer


def form_fields(page: str) -> MultiDict[str, str]:
    """The fields of a page that a browser would send: inputs, ticked boxes and chosen options."""
    form: MultiDict[str, str] = MultiDict()
    for tag, attributes, inside in re.findall(
        r"<(input|select)\b([^>]*)>((?:(?!<input|<select).)*?(?=</select>))?", page, re.DOTALL
    ):
        given = {name: unescape(value) for name, value in re.findall(r'([\w-]+)="([^"]*)"', attributes)}
        if "name" not in given or given.get("type") == "file":
            continue
        if tag == "select":
            options = re.findall(r"<option([^>]*)>([^<]*)", inside)
            chosen = next((one for one in options if "selected" in one[0]), options[0] if options else None)
            if chosen is not None:
                value = re.search(r'value="([^"]*)"', chosen[0])
                form.add(given["name"], unescape(value[1] if value else chosen[1]))
        elif given.get("type") not in ("checkbox", "radio") or re.search(r"\bchecked\b", attributes):
            form.add(given["name"], given.get("value", "on"))
    return form
