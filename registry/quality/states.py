"""Words for the state of one control result, of an analyte in a batch, and of a batch."""

from __future__ import annotations

#: One control result: by code, worst last; ``not judged`` where nothing published or agreed says what it should be.
NOT_JUDGED, PASSED, WARNED, FAILED = range(4)

#: An analyte in a batch, and a batch: by code, worst last.
PASSES, REMARKS, FAILS = range(3)
STATE_WORDS = ("passes", "passes with remarks", "fails")
