"""The drill holes of the invented district: collars, surveys and logs."""

from __future__ import annotations

from seed_demo.district import Hole, Unit

KESTRIN, VANTRY, MARROWAN, HEBRUN = "Kestrin stock", "Vantry pluton", "Marrowan complex", "Hebrun sill"
OSTREVEL, CORVANE, YSKER, DRISK = "Ostrevel granite", "Corvane granite", "Ysker leucogranite", "Drisk feeder"

_QUELLMAR = (
    Hole(
        "KD001", "Quellmar", 482310.0, 5573140.0, 412.0, 342.0,
        ((0.0, 62.0, -65.0), (60.0, 62.6, -64.4), (120.0, 63.5, -63.8), (180.0, 64.1, -63.1), (240.0, 65.2, -62.3),
         (300.0, 66.0, -61.7), (342.0, 66.4, -61.2)),
        7.5, 100, "A417",
        (
            Unit(0.0, 14.0, "overburden", "soil and blocks"),
            Unit(14.0, 118.0, "dacite porphyry", "hornblende-biotite-plagioclase phyric", KESTRIN, (0.1, 0.5)),
            Unit(118.0, 176.0, "dacite porphyry", "sericite-quartz-pyrite, sheeted veins", KESTRIN, (0.4, 0.6),
                 "phyllic", 0.9),
            Unit(176.0, 236.0, "dacite porphyry", "secondary biotite, K-feldspar in veins", KESTRIN, (0.3, 0.5),
                 "potassic", 0.8),
            Unit(236.0, 342.0, "dacite porphyry", "fresh, magnetite in groundmass", KESTRIN, (0.5, 0.95)),
        ),
    ),
    Hole(
        "KD002", "Quellmar", 482905.0, 5572660.0, 398.0, 318.0,
        ((0.0, 245.0, -60.0), (80.0, 245.9, -59.1), (160.0, 247.0, -58.4), (240.0, 248.2, -57.2),
         (318.0, 249.0, -56.6)),
        7.5, 200, "K88",
        (
            Unit(0.0, 8.0, "overburden", "soil"),
            Unit(8.0, 126.0, "dacite porphyry", "hornblende phyric", KESTRIN, (0.2, 0.8)),
            Unit(126.0, 150.0, "hornfels", "dark, biotite; contact zone"),
            Unit(150.0, 262.0, "granodiorite", "equigranular, pyroxene cores in amphibole", VANTRY, (0.3, 0.7)),
            Unit(262.0, 318.0, "granodiorite", "chlorite along joints", VANTRY, (0.6, 0.9), "chloritic", 0.8),
        ),
    ),
    # Sent for an ore package first; of the upper part the pulps were analysed again by fusion.
    Hole(
        "KD003", "Quellmar", 482070.0, 5572890.0, 405.0, 286.0,
        ((0.0, 118.0, -58.0), (90.0, 119.2, -57.1), (180.0, 120.3, -56.4), (286.0, 121.9, -55.2)),
        7.0, 300, "Z19:aqua regia",
        (
            Unit(0.0, 11.0, "overburden", "soil and blocks"),
            Unit(11.0, 96.0, "dacite porphyry", "sericite-pyrite, leached near surface", KESTRIN, (0.3, 0.6), "phyllic",
                 0.7, certificates=("A417", "Z19:aqua regia")),
            Unit(96.0, 214.0, "dacite porphyry", "secondary biotite, chalcopyrite in veins", KESTRIN, (0.3, 0.6),
                 "potassic", 1.0),
            Unit(214.0, 286.0, "dacite porphyry", "hornblende phyric, weakly veined", KESTRIN, (0.5, 0.8)),
        ),
    ),
    Hole(
        "VD001", "Quellmar", 485410.0, 5571320.0, 366.0, 243.0,
        ((0.0, 0.0, -90.0), (120.0, 204.0, -89.1), (243.0, 211.0, -88.2)),
        7.5, 400, "A417",
        (
            Unit(0.0, 5.0, "overburden", "grus"),
            Unit(5.0, 31.0, "granodiorite", "weathered joints", VANTRY, (0.1, 0.2), "weathered", 0.7),
            Unit(31.0, 243.0, "granodiorite", "equigranular, fresh", VANTRY, (0.1, 0.8)),
        ),
    ),
    Hole(
        "HD001", "Quellmar", 489830.0, 5566480.0, 288.0, 164.0,
        ((0.0, 0.0, -90.0), (80.0, 40.0, -89.4), (164.0, 47.0, -89.0)),
        4.5, 700, "T506",
        (
            Unit(0.0, 9.0, "sandstone", "baked, quartzitic near the contact"),
            Unit(9.0, 72.0, "gabbro", "fine-grained margin, then ophitic", HEBRUN, (0.05, 0.6)),
            Unit(72.0, 138.0, "gabbro", "coarse, pods of feldspar", HEBRUN, (0.95, 0.2)),
            Unit(138.0, 164.0, "siltstone", "spotted hornfels for 6 m"),
        ),
    ),
    Hole(
        "MD001", "Quellmar", 486950.0, 5568120.0, 331.0, 436.0,
        ((0.0, 312.0, -70.0), (110.0, 313.1, -69.4), (220.0, 314.0, -68.9), (330.0, 315.2, -68.1),
         (436.0, 316.0, -67.5)),
        8.5, 500, "T506",
        (
            Unit(0.0, 6.0, "overburden", "soil"),
            Unit(6.0, 132.0, "norite", "laminated", MARROWAN, (0.9, 0.1), suite="layered_norite"),
            Unit(132.0, 232.0, "orthopyroxenite", "granular, chromite seams", MARROWAN, (0.9, 0.1),
                 suite="layered_pyroxenite"),
            Unit(232.0, 300.0, "harzburgite", "poikilitic", MARROWAN, (0.9, 0.5), suite="layered_ultramafic"),
            Unit(300.0, 352.0, "serpentinite", "after harzburgite, mesh texture; fibrous veins", MARROWAN, (0.5, 0.1),
                 "serpentinised", 0.9, "layered_ultramafic"),
            Unit(352.0, 418.0, "norite", "vari-textured, blebs of pyrrhotite and chalcopyrite", MARROWAN, (0.9, 0.1),
                 suite="layered_contact"),
            Unit(418.0, 436.0, "gneiss", "footwall, partly melted"),
        ),
    ),
    Hole(
        "MD002", "Quellmar", 487420.0, 5567700.0, 326.0, 372.0,
        ((0.0, 308.0, -65.0), (120.0, 309.5, -64.1), (240.0, 310.8, -63.3), (372.0, 312.6, -62.0)),
        8.0, 600, "T506",
        (
            Unit(0.0, 7.0, "overburden", "soil"),
            Unit(7.0, 118.0, "orthopyroxenite", "granular", MARROWAN, (0.8, 0.1), suite="layered_pyroxenite"),
            Unit(118.0, 268.0, "harzburgite", "poikilitic, chromite", MARROWAN, (0.95, 0.1),
                 suite="layered_ultramafic"),
            Unit(268.0, 351.0, "norite", "vari-textured, net-veined sulphide", MARROWAN, (0.8, 0.1),
                 suite="layered_contact"),
            Unit(351.0, 372.0, "gneiss", "footwall"),
        ),
    ),
    # The oldest hole of the project: four acids only, no silica.
    Hole(
        "MD003", "Quellmar", 486310.0, 5568690.0, 338.0, 298.0,
        ((0.0, 300.0, -60.0), (150.0, 302.4, -58.8), (298.0, 304.9, -57.5)),
        9.0, 800, "Z19:four-acid",
        (
            Unit(0.0, 8.0, "overburden", "soil"),
            Unit(8.0, 176.0, "norite", "laminated", MARROWAN, (0.9, 0.2), suite="layered_norite"),
            Unit(176.0, 298.0, "orthopyroxenite", "granular", MARROWAN, (0.9, 0.3), suite="layered_pyroxenite"),
        ),
    ),
)  # fmt: skip
_OSTREVEL = (
    Hole(
        "OD001", "Ostrevel", 503480.0, 5561220.0, 655.0, 264.0,
        ((0.0, 0.0, -90.0), (130.0, 12.0, -89.2), (264.0, 15.0, -88.6)),
        7.5, 300, "K88",
        (
            Unit(0.0, 6.0, "overburden", "grus"),
            Unit(6.0, 30.0, "biotite granite", "weathered joints", OSTREVEL, (0.2, 0.3), "weathered", 0.8),
            Unit(30.0, 264.0, "biotite granite", "K-feldspar megacrysts", OSTREVEL, (0.1, 0.95)),
        ),
    ),
    Hole(
        "OD002", "Ostrevel", 505620.0, 5560140.0, 698.0, 352.0,
        ((0.0, 88.0, -75.0), (120.0, 88.8, -74.2), (240.0, 90.1, -73.0), (352.0, 91.5, -72.1)),
        9.0, 400, "K88",
        (
            Unit(0.0, 4.0, "overburden", "grus"),
            Unit(4.0, 352.0, "biotite granite", "K-feldspar megacrysts, fresh", OSTREVEL, (0.0, 0.8)),
        ),
    ),
    Hole(
        "CD001", "Ostrevel", 509140.0, 5557310.0, 742.0, 306.0,
        ((0.0, 155.0, -62.0), (100.0, 156.1, -61.3), (200.0, 157.0, -60.4), (306.0, 158.6, -59.2)),
        7.5, 600, "B2231",
        (
            Unit(0.0, 9.0, "overburden", "grus and blocks"),
            Unit(9.0, 97.0, "biotite granite", "medium-grained", CORVANE, (0.8, 0.95)),
            Unit(97.0, 141.0, "greisen", "quartz-muscovite-topaz, cassiterite in vugs", CORVANE, (0.9, 1.0), "greisen",
                 0.9),
            Unit(141.0, 306.0, "biotite granite", "sparse megacrysts", CORVANE, (0.75, 0.2)),
        ),
    ),
    Hole(
        "CD002", "Ostrevel", 509760.0, 5556780.0, 733.0, 252.0,
        ((0.0, 340.0, -55.0), (120.0, 341.8, -53.9), (252.0, 343.7, -52.4)),
        7.5, 700, "B2231",
        (
            Unit(0.0, 38.0, "schist", "spotted, tourmaline along the contact"),
            Unit(38.0, 252.0, "biotite granite", "fine-grained margin, then medium-grained", CORVANE, (0.95, 0.3)),
        ),
    ),
    Hole(
        "YD001", "Ostrevel", 498230.0, 5563940.0, 604.0, 212.0,
        ((0.0, 20.0, -68.0), (100.0, 21.0, -67.1), (212.0, 22.4, -66.2)),
        5.5, 900, "B2231",
        (
            Unit(0.0, 5.0, "overburden", "soil"),
            Unit(5.0, 148.0, "muscovite leucogranite", "garnet-bearing", YSKER, (0.2, 0.8)),
            Unit(148.0, 171.0, "pegmatite", "albite-muscovite, beryl", YSKER, (0.9, 1.0)),
            Unit(171.0, 212.0, "muscovite leucogranite", "fine-grained", YSKER, (0.6, 0.3)),
        ),
    ),
    Hole(
        "YD002", "Ostrevel", 498640.0, 5563510.0, 597.0, 146.0,
        ((0.0, 205.0, -60.0), (70.0, 205.8, -59.3), (146.0, 207.0, -58.1)),
        6.0, 200, "W77",
        (
            Unit(0.0, 6.0, "overburden", "soil"),
            Unit(6.0, 128.0, "muscovite leucogranite", "fine-grained", YSKER, (0.1, 0.7)),
            Unit(128.0, 146.0, "mica schist", "country rock, tourmaline"),
        ),
    ),
    Hole(
        "DD001", "Ostrevel", 512480.0, 5566350.0, 881.0, 366.0,
        ((0.0, 0.0, -90.0), (180.0, 95.0, -89.0), (366.0, 101.0, -87.9)),
        7.5, 1000, "W77",
        (
            Unit(0.0, 3.0, "overburden", "ash"),
            Unit(3.0, 118.0, "rhyolite", "flow-banded lava of the dome", DRISK, (0.7, 0.9)),
            Unit(118.0, 152.0, "rhyolite", "bleached, clay and alunite, warm water at 140 m", DRISK, (0.6, 0.7),
                 "argillic", 0.9),
            Unit(152.0, 214.0, "tuff", "older, welded"),
            Unit(214.0, 366.0, "rhyolite", "feeder dyke, feldspar-phyric", DRISK, (0.2, 0.7)),
        ),
    ),
)  # fmt: skip
HOLES = (*_QUELLMAR, *_OSTREVEL)
