"""The sequence of the CIPW norm in moles, shared by the weight norm and the cation norm.

One pass over a chunk of rows: arrays of shape (n,) of moles per 100 g go in, moles of the minerals come out. Or, ab,
ne, lc, kp, ac, ns and ks are counted per mole of alkali oxide (two formula units), hy per (Mg,Fe)O, ol per
(Mg,Fe)2SiO4, di per CaO, ap per P2O5, hl per NaCl, pr per FeS2, fr per CaF2.

Order and caps: [kelsey1965] and [cox1979], from memory; the caps (nothing takes more than is left) are the project's.
"""

from __future__ import annotations

from collections.abc import Callable
from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]
#: Gives memory for one step: an array of the chunk's length with whatever in it.
Take = Callable[[], Array]
#: Rows that a chunk of the complete norm needs, with some to spare.
SCRATCH_ROWS = 80

#: Moles of CaO in apatite per mole of P2O5, and of F (10 CaO 3 P2O5 with one CaO as CaF2).
CAO_PER_P2O5 = 10.0 / 3.0
F_PER_P2O5 = 2.0 / 3.0


class Moles(NamedTuple):
    """Moles per 100 g. ``fe2`` holds Mn and Ni, ``ca`` Sr and Ba, ``na`` Li, ``fe3`` V; None: not analysed."""

    si: Array
    ti: Array
    al: Array
    fe3: Array
    fe2: Array
    mg: Array
    ca: Array
    na: Array
    k: Array
    p: Array
    cr: Array | None = None
    zr: Array | None = None
    co2: Array | None = None
    s: Array | None = None
    so3: Array | None = None
    f: Array | None = None
    cl: Array | None = None


class EarlyMinerals(NamedTuple):
    """The accessory minerals, with what they leave of calcium, sodium, ferrous iron and silica."""

    cc: Array | None
    ap: Array
    f_in_ap: Array | None
    hl: Array | None
    th: Array | None
    pr: Array | None
    fr: Array | None
    cm: Array | None
    z: Array | None
    ca: Array
    na: Array
    fe2: Array
    si: Array


class Minerals(NamedTuple):
    """Moles of the normative minerals; ``mg_share`` is Mg/(Mg + Fe) of di, hy and ol; None: not analysed for."""

    q: Array
    c: Array
    z: Array | None
    or_: Array
    ab: Array
    an: Array
    lc: Array
    ne: Array
    kp: Array
    hl: Array | None
    th: Array | None
    ac: Array
    ns: Array
    ks: Array
    di: Array
    wo: Array
    hy: Array
    ol: Array
    cs: Array
    mt: Array
    cm: Array | None
    hm: Array
    il: Array
    tn: Array
    pf: Array
    ru: Array
    ap: Array
    f_in_ap: Array | None
    fr: Array | None
    pr: Array | None
    cc: Array | None
    mg_share: Array
    silica_deficit: Array


class Scratch:
    """Rows of one block of memory, handed out in turn, so that a chunk allocates nothing while it is computed.

    Without it the allocator gives the memory of each chunk back to the system and takes it anew, which costs several
    times the arithmetic (measured).
    """

    def __init__(self, rows: int) -> None:
        self._rows = list(np.empty((SCRATCH_ROWS, rows)))

    def rows(self, length: int) -> Take:
        """A function that gives one row of the length after the other, from the first row on."""
        rows = self._rows if length == len(self._rows[0]) else [row[:length] for row in self._rows]
        return iter(rows).__next__


def allot_accessories(moles: Moles, take: Take) -> EarlyMinerals:
    """Steps 1 to 4 and zircon: calcite, apatite, halite, thenardite, pyrite, fluorite, chromite, zircon.

    Takes the arrays ``ca na fe2 si`` of ``moles`` for its own and changes them; the others stay. ``take`` gives memory.
    """
    ca, na, fe2, si = moles.ca, moles.na, moles.fe2, moles.si
    cc = f_in_ap = hl = th = pr = fr = cm = z = None
    spare = take()
    if moles.co2 is not None:
        cc = np.minimum(moles.co2, ca, out=take())
        ca -= cc
    ap = np.multiply(ca, 1.0 / CAO_PER_P2O5, take())
    np.minimum(ap, moles.p, out=ap)
    ca -= np.multiply(ap, CAO_PER_P2O5, spare)
    # Rounding must not leave a trace of calcium below zero where phosphorus takes it all.
    np.maximum(ca, 0.0, out=ca)
    if moles.f is not None:
        f_in_ap = np.multiply(ap, F_PER_P2O5, take())
        np.minimum(f_in_ap, moles.f, out=f_in_ap)
        fr = np.subtract(moles.f, f_in_ap, take())
        fr *= 0.5
        np.minimum(fr, ca, out=fr)
        ca -= fr
    if moles.cl is not None:
        hl = np.multiply(moles.cl, 0.5, take())
        np.minimum(hl, na, out=hl)
        na -= hl
        hl *= 2.0
    if moles.so3 is not None:
        th = np.minimum(moles.so3, na, out=take())
        na -= th
    if moles.s is not None:
        pr = np.multiply(moles.s, 0.5, take())
        np.minimum(pr, fe2, out=pr)
        fe2 -= pr
    if moles.cr is not None:
        cm = np.minimum(moles.cr, fe2, out=take())
        fe2 -= cm
    if moles.zr is not None:
        z = np.minimum(moles.zr, si, out=take())
        si -= z
    return EarlyMinerals(cc, ap, f_in_ap, hl, th, pr, fr, cm, z, ca, na, fe2, si)


def allot_minerals(moles: Moles, take: Take) -> Minerals:
    """The whole sequence of the norm, down the silica ladder to kaliophilite.

    Takes the arrays of ``moles`` for its own and changes them; ``take`` gives memory. A deficit of silica that is left
    when all is desilicated is ``silica_deficit`` (moles of SiO2 that the minerals hold beyond the analysis).
    """
    early = allot_accessories(moles, take)
    ca, na, fe2 = early.ca, early.na, early.fe2
    ti, al, fe3, k, mg = moles.ti, moles.al, moles.fe3, moles.k, moles.mg

    il = _pair(ti, fe2, take())
    or_ = _pair(k, al, take())
    ab = _pair(na, al, take())
    ac = _pair(na, fe3, take())
    an = _pair(al, ca, take())
    tn = _pair(ti, ca, take())
    mt = _pair(fe3, fe2, take())
    ks, ns, c, ru, hm = k, na, al, ti, fe3

    mafic = np.add(mg, fe2, fe2)
    mg_share = np.maximum(mafic, 1e-300, out=take())
    np.divide(mg, mg_share, mg_share)
    di = _pair(ca, mafic, take())
    wo, hy = ca, mafic

    spare = take()
    need = np.add(or_, ab, take())
    need *= 3.0
    need += an
    need += di
    need += np.multiply(ac, 2.0, spare)
    need *= 2.0
    for mineral in (ns, ks, tn, wo, hy):
        need += mineral
    q = np.subtract(early.si, need, take())
    deficit = np.subtract(need, early.si, need)
    np.maximum(q, 0.0, out=q)
    np.maximum(deficit, 0.0, out=deficit)

    ol = _desilicate(deficit, hy, 2.0, 1.0, take(), spare)
    pf = _desilicate(deficit, tn, 1.0, 1.0, take(), spare)
    ne = _desilicate(deficit, ab, 1.0, 4.0, take(), spare)
    lc = _desilicate(deficit, or_, 1.0, 2.0, take(), spare)
    cs = _desilicate(deficit, wo, 2.0, 1.0, take(), spare)
    half = _desilicate(deficit, di, 1.0, 1.0, take(), spare)
    half *= 0.5
    cs += half
    ol += half
    kp = _desilicate(deficit, lc, 1.0, 2.0, take(), spare)

    return Minerals(
        q=q, c=c, z=early.z, or_=or_, ab=ab, an=an, lc=lc, ne=ne, kp=kp, hl=early.hl, th=early.th, ac=ac, ns=ns,
        ks=ks, di=di, wo=wo, hy=hy, ol=ol, cs=cs, mt=mt, cm=early.cm, hm=hm, il=il, tn=tn, pf=pf, ru=ru, ap=early.ap,
        f_in_ap=early.f_in_ap, fr=early.fr, pr=early.pr, cc=early.cc, mg_share=mg_share, silica_deficit=deficit,
    )  # fmt: skip


def _pair(first: Array, second: Array, out: Array) -> Array:
    """As much as both have, taken from both."""
    np.minimum(first, second, out=out)
    first -= out
    second -= out
    return out


def _desilicate(deficit: Array, rich: Array, consumed: float, silica: float, out: Array, spare: Array) -> Array:
    """Moles of the silica-poor mineral made: each takes ``consumed`` of the rich one and gives ``silica`` SiO2 back."""
    of_rich = rich if consumed == 1.0 else np.multiply(rich, 1.0 / consumed, spare)
    if silica == 1.0:
        np.minimum(deficit, of_rich, out=out)
    else:
        np.multiply(deficit, 1.0 / silica, out)
        np.minimum(out, of_rich, out=out)
    rich -= out if consumed == 1.0 else np.multiply(out, consumed, spare)
    deficit -= out if silica == 1.0 else np.multiply(out, silica, spare)
    return out
