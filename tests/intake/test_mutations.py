"""Files damaged at random are read or refused in sentences, never with a traceback. The files are invented."""

from __future__ import annotations

import gzip
import io
import random

import numpy as np
import openpyxl
import pytest

from registry.intake import KINDS, ReadingOptions, read_file

WIDE = (
    "Invented Assays\nCertificate No: NW1\nMethod,,Lithium borate fusion,XRF,Fire assay\n"
    "Sample ID,From,SiO2,TFe2O3,Au\nUnit,m,%,%,ppb\nLOD,,0.01,0.01,1\n"
    + "".join(f"A-{n:03d},{n},{40 + n / 7:.2f},{n % 9}.1,{'<1' if n % 3 else n}\n" for n in range(40))
    + "Mean,,50,4,2\n"
)
LONG = "Sample ID,Analyte,Result,Unit,Method,LOD\n" + "".join(
    f"A-{n // 2},{'Zr' if n % 2 else 'SiO2'},{n + 1},{'ppm' if n % 2 else '%'},fusion,1\n" for n in range(40)
)
TURNED = "Sample ID,,A-1,A-2\nSiO2,%,60,50\nMgO,%,2,3\nZr,ppm,180,<2\nNb,ppm,n.d.,5\n"


def _workbook() -> bytes:
    book = openpyxl.Workbook()
    for line in WIDE.splitlines():
        book.active.append(line.split(","))
    stream = io.BytesIO()
    book.save(stream)
    return stream.getvalue()


WORKBOOK = _workbook()
FILES = (
    WIDE.encode(),
    WIDE.replace(",", ";").replace(".", ",").encode("cp1252"),
    WIDE.encode("utf-16"),
    ('"' + WIDE.replace(",", '","').replace("\n", '"\r\n"') + '"').encode(),
    WIDE.replace("n", "é").replace("\n", "\r").encode("mac_roman"),
    LONG.encode(),
    TURNED.encode(),
    gzip.compress(WIDE.encode(), mtime=0),
    WORKBOOK,
    b"site_code,easting,northing,epsg,site_kind\nA,500000,5200000,32633,outcrop\nB,500001,5200001,32633,drill_hole\n",
    b"site_code,depth_m,azimuth_deg,dip_deg\nA,0,90,-60\nA,50,91,-61\nB,0,0,-90\n",
    b"sample_code,site_code,from_m,to_m,collected_on,pulp_available\nS1,A,0,1,2024-05-31,yes\nS2,A,1,2,,no\n",
    b"intrusion,shape,half_width_m,age_ma\nBlue,sphere,500,280\nRed,slab,20,300\n",
    b"reference_material,analyte,value,unit,source\nR,SiO2,60,wt%,invented\nR,Zr,180,ppm,invented\n",
)


def damaged(source: random.Random) -> bytes:
    data = bytearray(source.choice(FILES))
    for _ in range(source.choice((1, 1, 2, 5, 30))):
        place = source.randrange(len(data) + 1)
        span = source.choice((1, 1, 2, 8, 100))
        action = source.randrange(6)
        if action == 0:
            data[place : place + span] = source.randbytes(span)
        elif action == 1:
            del data[place : place + span]
        elif action == 2:
            data[place:place] = data[place - span : place]
        elif action == 3:
            data[place:place] = source.choice((b'"', b",", b";", b"\n", b"\r", b"\x00", b"<", b"-", b"\xff\xfe", b"_"))
        elif action == 4:
            data[place : place + 1] = source.choice(
                (b"9", b"e", b"nan", b"inf", b"1e400", b"\xe9", b"\xe2\x88\x92", b"%")
            )
        else:
            data = data[: max(place, 1)]
        data = data or bytearray(b"x")
    return bytes(data)


def check(count: int, seed: int) -> None:
    source = random.Random(seed)
    for number in range(count):
        data = damaged(source)
        kind = source.choice((None, None, None, *KINDS))
        options = ReadingOptions(negative_means_below=number % 7 == 0)
        reading = read_file("damaged.csv", data, kind, options)
        assert reading.ok or all(problem.sentence() for problem in reading.problems)
        if reading.ok:
            assert (reading.master is None) != (reading.results is None), data
        if reading.results is not None:
            table = reading.results
            shape = (len(table.sample_codes), len(table.columns))
            assert table.values.shape == table.qualifiers.shape == shape, data
            assert len(table.line_no) == shape[0]
            assert len(table.control_text) in (0, shape[0])
            assert not np.isinf(table.values).any(), data
            assert not (np.isnan(table.values) & (table.qualifiers > 0)).any(), data
            assert (np.diff(table.line_no) > 0).all(), data
        if reading.master is not None:
            assert {len(values) for values in reading.master.rows.values()} == {len(reading.master)}, data


def test_five_hundred_damaged_files_are_read_or_refused_in_sentences():
    check(500, 20240531)


@pytest.mark.slow
def test_ten_thousand_damaged_files_are_read_or_refused_in_sentences():
    check(10_000, 7)
