"""What the lines above a table say: certificate, laboratory, dates, one unit or one method for everything."""

from __future__ import annotations

import re
from dataclasses import dataclass

from registry.intake.fields import iso_date
from registry.intake.methods import digestion_in
from registry.intake.units import canonical_unit

_CERTIFICATE = re.compile(
    r"(?i)\b(?:certificate|cert\.?|report|work ?order|job)(?: of analysis)?(?: ?(?:no|number|nr|id)\b\.?| ?#)?"
    r"\s*[:,#=]\s*(?P<code>[A-Za-z0-9][\w./\-]*)"
)
_LAB = re.compile(r"(?i)\b(?:laboratory|laboratories|lab)(?: name)?\s*[:,=]\s*(?P<name>[^,;:]+)")
_DAY = (
    r"(?: of samples?| on)?\s*[:,=]?\s*"
    r"(?P<day>\d{4}[./-]\d{1,2}[./-]\d{1,2}|\d{1,2}[ ./-](?:\d{1,2}|[A-Za-z]{3,9})[ ./-]\d{4}"
    r"|[A-Za-z]{3,9} \d{1,2},? \d{4})\b"
)
_RECEIVED = re.compile(r"(?i)\b(?:(?:date )?received|date of receipt|receipt date)" + _DAY)
_REPORTED = re.compile(
    r"(?i)\b(?:(?:date )?(?:reported|issued|completed|finali[sz]ed)|date of (?:the )?(?:report|issue|certificate)"
    r"|(?:report|issue|certificate) date|reporting date)" + _DAY
)
_UNIT = re.compile(
    r"(?i)\b(?:units?|all (?:results|values|data|elements|concentrations)|results|values|concentrations|data|reported)"
    r"(?: (?:are|is|given|reported|stated))*(?: in)?\s*[:,=]?\s*(?P<unit>\S+(?: ?%)?)"
)


_LABEL = re.compile(r"(?i)^\W*(analytical )?(methods?|digestion|analysis|technique)\s*[:=]\s*")


@dataclass(frozen=True)
class Titles:
    """What the title lines say; ``unclear_days`` are dates that can be read in two ways, which are left out."""

    certificate: str | None = None
    lab: str | None = None
    unit: str | None = None
    digestion: str | None = None
    method: str | None = None
    received_on: str | None = None
    reported_on: str | None = None
    unclear_days: tuple[str, ...] = ()


def read_titles(lines: list[str]) -> Titles:
    """Read the title lines; a unit or digestion counts only if no other line contradicts it."""
    certificate = lab = method = None
    units, digestions = set(), set()
    days: dict[re.Pattern[str], str] = {}
    unclear: list[str] = []
    for line in lines:
        found = _CERTIFICATE.search(line)
        if found and certificate is None and re.search(r"\d", found["code"]):
            certificate = found["code"]
        found = _LAB.search(line)
        if found and lab is None:
            lab = found["name"].strip()
        for pattern in (_RECEIVED, _REPORTED):
            found = pattern.search(line)
            if found and pattern not in days:
                day = iso_date(found["day"])
                if day is None:
                    unclear.append(found["day"])
                else:
                    days[pattern] = day
        for stated in _UNIT.finditer(line):
            unit = canonical_unit(stated["unit"].rstrip(".,;")) or canonical_unit(
                stated["unit"].split()[0].rstrip(".,;")
            )
            if unit:
                units.add(unit)
        digestion = digestion_in(line)
        if digestion:
            digestions.add(digestion)
            method = _LABEL.sub("", line.strip())
    return Titles(
        certificate,
        lab,
        units.pop() if len(units) == 1 else None,
        digestions.pop() if len(digestions) == 1 else None,
        method,
        days.get(_RECEIVED),
        days.get(_REPORTED),
        tuple(unclear),
    )
