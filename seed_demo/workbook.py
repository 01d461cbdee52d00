"""A spreadsheet workbook written by hand, so that the same rows give the same bytes everywhere (Office Open XML)."""

from __future__ import annotations

import io
import zipfile
from collections.abc import Mapping, Sequence
from xml.sax.saxutils import escape

_MAIN = "http://schemas.openxmlformats.org/spreadsheetml/2006/main"
_OFFICE = "http://schemas.openxmlformats.org/officeDocument/2006/relationships"
_PACKAGE = "http://schemas.openxmlformats.org/package/2006"
_TYPE = "application/vnd.openxmlformats-officedocument.spreadsheetml"
_HEAD = '<?xml version="1.0" encoding="UTF-8" standalone="yes"?>\n'


def workbook(sheets: Mapping[str, Sequence[Sequence[str]]]) -> bytes:
    """The bytes of a workbook with these sheets of texts; a text that is a plain number becomes a number."""
    names = list(sheets)
    numbers = range(1, len(names) + 1)
    parts = {
        "[Content_Types].xml": f'<Types xmlns="{_PACKAGE}/content-types">'
        '<Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/>'
        f'<Override PartName="/xl/workbook.xml" ContentType="{_TYPE}.sheet.main+xml"/>'
        + "".join(
            f'<Override PartName="/xl/worksheets/sheet{n}.xml" ContentType="{_TYPE}.worksheet+xml"/>' for n in numbers
        )
        + "</Types>",
        "_rels/.rels": f'<Relationships xmlns="{_PACKAGE}/relationships">'
        f'<Relationship Id="r1" Type="{_OFFICE}/officeDocument" Target="xl/workbook.xml"/></Relationships>',
        "xl/workbook.xml": f'<workbook xmlns="{_MAIN}" xmlns:r="{_OFFICE}"><sheets>'
        + "".join(
            f'<sheet name="{escape(name)}" sheetId="{n}" r:id="r{n}"/>' for n, name in zip(numbers, names, strict=True)
        )
        + "</sheets></workbook>",
        "xl/_rels/workbook.xml.rels": f'<Relationships xmlns="{_PACKAGE}/relationships">'
        + "".join(
            f'<Relationship Id="r{n}" Type="{_OFFICE}/worksheet" Target="worksheets/sheet{n}.xml"/>' for n in numbers
        )
        + "</Relationships>",
    }
    for n, name in zip(numbers, names, strict=True):
        rows = "".join(
            f'<row r="{line}">' + "".join(_cell(place, line, text) for place, text in enumerate(row)) + "</row>"
            for line, row in enumerate(sheets[name], 1)
        )
        parts[f"xl/worksheets/sheet{n}.xml"] = f'<worksheet xmlns="{_MAIN}"><sheetData>{rows}</sheetData></worksheet>'
    stream = io.BytesIO()
    with zipfile.ZipFile(stream, "w", zipfile.ZIP_STORED) as archive:
        for path, text in parts.items():
            archive.writestr(zipfile.ZipInfo(path, (1980, 1, 1, 0, 0, 0)), _HEAD + text)
    return stream.getvalue()


def _cell(place: int, line: int, text: str) -> str:
    if text == "":
        return ""
    where = f"{_letters(place)}{line}"
    try:
        float(text)
    except ValueError:
        return f'<c r="{where}" t="inlineStr"><is><t>{escape(text)}</t></is></c>'
    return f'<c r="{where}"><v>{text}</v></c>'


def _letters(place: int) -> str:
    """Column letters: 0 -> A, 26 -> AA."""
    text = ""
    place += 1
    while place:
        place, rest = divmod(place - 1, 26)
        text = chr(ord("A") + rest) + text
    return text
