"""The outcrop stations of the invented district."""

from __future__ import annotations

from seed_demo.district import INTRUSIONS, Outcrop

#: A line a station: code, easting, northing, elevation (m), certificate, first word of the body, suite where it is not
#: the body's, places in the suite (a sample each), strength of weathering, kind of the samples.
_STATIONS = """
Q001 482393 5573022 438 A417  Kestrin  -                  0.45      0.7 outcrop
Q002 482815 5572921 417 A417  Kestrin  -                  0.11      0   outcrop
Q003 482496 5573418 419 A417  Kestrin  -                  0.96,0.95 0.9 outcrop
Q004 482630 5573098 432 A417  Kestrin  -                  0.08      0   outcrop
Q005 482570 5573284 399 A417  Kestrin  -                  0.83,0.52 0.9 outcrop
Q006 481856 5572452 420 A417  Kestrin  -                  0.98      0   outcrop
Q007 482228 5572626 396 A417  Kestrin  -                  0.56      0   outcrop
Q008 482866 5572814 440 A417  Kestrin  -                  0.22      0   outcrop
Q009 483026 5572827 382 A417  Kestrin  -                  0.77      0   outcrop
Q010 484483 5569358 360 A417  Vantry   -                  0.15      0.9 outcrop
Q011 483528 5572329 346 A417  Vantry   -                  0.20,0.51 0.9 outcrop
Q012 484893 5570758 359 A417  Vantry   -                  0.02      0.7 outcrop
Q013 486662 5570101 359 A417  Vantry   -                  0.64,0.12 0   outcrop
Q014 484281 5572236 355 A417  Vantry   -                  0.39,0.09 0   outcrop
Q015 484223 5571585 358 A417  Vantry   -                  0.14      0.7 outcrop
Q016 485483 5572593 346 A417  Vantry   -                  0.32      0   outcrop
Q017 484248 5570021 379 A417  Vantry   -                  0.21,0.93 0   outcrop
Q018 484902 5569695 338 A417  Vantry   -                  0.25,0.70 0   outcrop
Q019 486738 5571166 366 A417  Vantry   -                  0.14      0   outcrop
Q020 486539 5571634 352 A417  Vantry   -                  0.74      0   outcrop
Q021 484994 5569530 346 A417  Vantry   -                  0.53,0.95 0   outcrop
H001 490404 5567365 292 A417  Hebrun   -                  0.58,0.15 0   outcrop
H002 489655 5566243 276 A417  Hebrun   -                  0.04      0.9 float
H003 488921 5566160 268 A417  Hebrun   -                  0.09      0.7 outcrop
H004 488880 5567285 296 A417  Hebrun   -                  0.78      0   outcrop
H005 490033 5567222 302 A417  Hebrun   -                  0.93      0   outcrop
H006 489831 5566725 280 A417  Hebrun   -                  0.03,0.09 0   outcrop
H007 490588 5567184 295 A417  Hebrun   -                  0.92      0.9 outcrop
M001 486793 5568809 308 T506  Marrowan layered_norite     0.05,0.60 0   float
M002 487723 5567503 345 T506  Marrowan layered_pyroxenite 0.27      0   outcrop
M003 486258 5568401 331 T506  Marrowan layered_norite     0.65,0.44 0   outcrop
M004 487199 5567657 326 T506  Marrowan layered_ultramafic 0.87      0   outcrop
M005 487657 5567678 311 T506  Marrowan layered_contact    0.82,0.83 0.9 float
M006 487765 5568779 310 T506  Marrowan layered_norite     0.28      0   outcrop
M007 486689 5568236 339 T506  Marrowan layered_norite     0.45,0.09 0   outcrop
M008 487094 5568521 318 T506  Marrowan layered_pyroxenite 0.32,0.78 0   outcrop
O001 503959 5559884 720 K88   Ostrevel -                  0.25,0.16 0   outcrop
O002 502915 5559592 694 K88   Ostrevel -                  0.94,0.68 0   outcrop
O003 503422 5561771 718 K88   Ostrevel -                  0.71,0.19 0   outcrop
O004 504443 5562609 690 K88   Ostrevel -                  0.40      0.9 outcrop
O005 502814 5562557 715 K88   Ostrevel -                  0.45      0   outcrop
O006 505776 5560556 698 K88   Ostrevel -                  0.78,0.93 0   outcrop
O007 506036 5559556 730 K88   Ostrevel -                  0.22      0   outcrop
O008 506018 5561133 722 K88   Ostrevel -                  0.27,0.71 0   outcrop
O009 502798 5560787 696 K88   Ostrevel -                  0.49,0.05 0   outcrop
C001 508377 5557073 762 B2231 Corvane  -                  0.47      0.7 outcrop
C002 509440 5557391 733 B2231 Corvane  -                  0.58      0.9 float
C003 508787 5557059 715 B2231 Corvane  -                  0.63,0.52 0.7 outcrop
C004 509777 5558001 784 B2231 Corvane  -                  0.22,0.84 0.7 outcrop
C005 509561 5556342 744 B2231 Corvane  -                  0.02,0.38 0.7 outcrop
C006 509435 5556781 776 B2231 Corvane  -                  0.14,0.11 0   float
C007 509485 5556810 794 B2231 Corvane  -                  0.28      0   outcrop
Y001 498240 5564101 642 B2231 Ysker    -                  0.52      0   outcrop
Y002 498518 5564125 564 B2231 Ysker    -                  0.05      0   outcrop
Y003 498587 5563522 586 B2231 Ysker    -                  0.50,0.50 0.7 outcrop
Y004 498410 5563451 571 B2231 Ysker    -                  0.86,0.04 0.9 outcrop
D001 512541 5565824 857 W77   Drisk    -                  0.63,0.53 0.7 outcrop
D002 512999 5565926 935 W77   Drisk    -                  0.89,0.32 0   outcrop
D003 512073 5566690 856 W77   Drisk    -                  0.15      0   outcrop
D004 511923 5566143 891 W77   Drisk    -                  0.54      0.9 outcrop
"""


def _outcrop(line: str) -> Outcrop:
    code, easting, northing, elevation, certificate, word, suite, progress, weathered, kind = line.split()
    (body,) = [each for each in INTRUSIONS if each.name.split()[0] == word]
    return Outcrop(
        code,
        body.area,
        float(easting),
        float(northing),
        float(elevation),
        certificate,
        body.name,
        None if suite == "-" else suite,
        tuple(float(share) for share in progress.split(",")),
        float(weathered),
        kind,
    )


OUTCROPS = tuple(_outcrop(line) for line in _STATIONS.split("\n") if line)
