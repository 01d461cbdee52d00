"""The sequence of the CIPW norm in moles, shared by the weight norm and the cation norm.

One pass over a chunk of rows: arrays of shape (n,) of moles per 100 g go in, moles of the minerals come out. Or, ab,
ne, lc, kp, ac, ns and ks are counted per mole of alkali oxide (two formula units), hy per (Mg,Fe)O, ol per
(Mg,Fe)2SiO4, di per CaO, ap per P2O5, hl per NaCl, pr per FeS2, fr per CaF2.

Order and caps: [kelsey1965] and [cox1979], from memory; the caps (nothing takes more than is left) are the project's.
"""

from __future__ import annotations

from typing import NamedTuple

import numpy as np
from numpy.typing import NDArray

Array = NDArray[np.float64]

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


def allot_accessories(moles: Moles) -> EarlyMinerals:
    """Steps 1 to 4 and zircon: calcite, apatite, halite, thenardite, pyrite, fluorite, chromite, zircon."""
    ca, na, fe2, si = moles.ca, moles.na, moles.fe2, moles.si
    cc = f_in_ap = hl = th = pr = fr = cm = z = None
    if moles.co2 is not None:
        cc = np.minimum(moles.co2, ca)
        ca = ca - cc
    ap = np.minimum(moles.p, ca * (1.0 / CAO_PER_P2O5))
    # Rounding must not leave a trace of calcium below zero where phosphorus takes it all.
    ca = np.maximum(ca - ap * CAO_PER_P2O5, 0.0)
    if moles.f is not None:
        f_in_ap = np.minimum(moles.f, ap * F_PER_P2O5)
        fr = np.minimum((moles.f - f_in_ap) * 0.5, ca)
        ca = ca - fr
    if moles.cl is not None:
        half = np.minimum(moles.cl * 0.5, na)
        na = na - half
        hl = half + half
    if moles.so3 is not None:
        th = np.minimum(moles.so3, na)
        na = na - th
    if moles.s is not None:
        pr = np.minimum(moles.s * 0.5, fe2)
        fe2 = fe2 - pr
    if moles.cr is not None:
        cm = np.minimum(moles.cr, fe2)
        fe2 = fe2 - cm
    if moles.zr is not None:
        z = np.minimum(moles.zr, si)
        si = si - z
    return EarlyMinerals(cc, ap, f_in_ap, hl, th, pr, fr, cm, z, ca, na, fe2, si)


def allot_minerals(moles: Moles) -> Minerals:
    """The whole sequence of the norm, down the silica ladder to kaliophilite.

    Q without silica deficit; a deficit that is left when all is desilicated is ``silica_deficit`` (moles of SiO2 that
    the minerals hold beyond the analysis).
    """
    early = allot_accessories(moles)
    ca, na, fe2, al, fe3 = early.ca, early.na, early.fe2, moles.al, moles.fe3

    il = np.minimum(moles.ti, fe2)
    ti, fe2 = moles.ti - il, fe2 - il
    or_ = np.minimum(moles.k, al)
    ks, al = moles.k - or_, al - or_
    ab = np.minimum(na, al)
    na, al = na - ab, al - ab
    ac = np.minimum(na, fe3)
    ns, fe3 = na - ac, fe3 - ac
    an = np.minimum(al, ca)
    c, ca = al - an, ca - an
    tn = np.minimum(ti, ca)
    ru, ca = ti - tn, ca - tn
    mt = np.minimum(fe3, fe2)
    hm, fe2 = fe3 - mt, fe2 - mt

    mafic = moles.mg + fe2
    mg_share = moles.mg / np.maximum(mafic, 1e-300)
    di = np.minimum(ca, mafic)
    wo, hy = ca - di, mafic - di

    need = 6.0 * (or_ + ab) + 4.0 * ac + 2.0 * (an + di) + (ns + ks) + (tn + wo) + hy
    spare = early.si - need
    q = np.maximum(spare, 0.0)
    deficit = q - spare

    u = np.minimum(deficit, hy * 0.5)
    ol, hy, deficit = u, hy - 2.0 * u, deficit - u
    pf = np.minimum(deficit, tn)
    tn, deficit = tn - pf, deficit - pf
    ne = np.minimum(deficit * 0.25, ab)
    ab, deficit = ab - ne, deficit - 4.0 * ne
    lc = np.minimum(deficit * 0.5, or_)
    or_, deficit = or_ - lc, deficit - 2.0 * lc
    cs = np.minimum(deficit, wo * 0.5)
    wo, deficit = wo - 2.0 * cs, deficit - cs
    u = np.minimum(deficit, di)
    half = u * 0.5
    di, deficit, cs, ol = di - u, deficit - u, cs + half, ol + half
    kp = np.minimum(deficit * 0.5, lc)
    lc, deficit = lc - kp, deficit - 2.0 * kp

    return Minerals(
        q=q, c=c, z=early.z, or_=or_, ab=ab, an=an, lc=lc, ne=ne, kp=kp, hl=early.hl, th=early.th, ac=ac, ns=ns,
        ks=ks, di=di, wo=wo, hy=hy, ol=ol, cs=cs, mt=mt, cm=early.cm, hm=hm, il=il, tn=tn, pf=pf, ru=ru, ap=early.ap,
        f_in_ap=early.f_in_ap, fr=early.fr, pr=early.pr, cc=early.cc, mg_share=mg_share, silica_deficit=deficit,
    )  # fmt: skip
