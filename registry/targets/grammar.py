"""The small language of the definitions: how a condition on a quantity is written, read and loosened."""

from __future__ import annotations

import re
from dataclasses import dataclass


@dataclass(frozen=True)
class Condition:
    """``quantity`` against a limit. ``sign``: ``>=  <=  >  <`` with the limit ``constant + slope * of``;
    ``between`` with ``constant`` and ``upper``; ``=`` with one of ``words``."""

    quantity: str
    sign: str
    constant: float = 0.0
    slope: float = 0.0
    of: str | None = None
    upper: float = 0.0
    words: tuple[str, ...] = ()
    text: str = ""

    @property
    def is_text(self) -> bool:
        return self.sign == "="


_NUMBER = r"[-+]?\d+(?:\.\d+)?(?:e[-+]?\d+)?"
_NAME = r"[a-z][a-z0-9_]*"
_LIMIT = re.compile(rf"(>=|<=|>|<) ({_NUMBER})(?: ([-+]) ({_NUMBER}) ({_NAME})| ({_NAME}))?")
_BETWEEN = re.compile(rf"between ({_NUMBER}) and ({_NUMBER})")
_WORDS = re.compile(r"= ([a-z][a-z_ ]*(?:, [a-z][a-z_ ]*)*)")
_WITHIN = re.compile(rf"within ({_NUMBER})( %)?")
_GRAMMAR = (
    "'>= 35', '<= 0.5 la_ppm', '>= 32.5 - 0.385 sio2_vf_wt', 'between 40 and 88' or '= magnetite'"
    " (near also 'within 10 %' or 'within 0.03')"
)


def parse_test(quantity: str, text: str) -> Condition:
    """The test written as ``text`` on ``quantity``; ValueError with the grammar where it is none."""
    if match := _LIMIT.fullmatch(text):
        sign, first, joined, slope, of, direct = match.groups()
        if direct:
            return Condition(quantity, sign, 0.0, float(first), direct, text=text)
        if of:
            return Condition(quantity, sign, float(first), float(joined + slope), of, text=text)
        return Condition(quantity, sign, float(first), text=text)
    if match := _BETWEEN.fullmatch(text):
        low, high = map(float, match.groups())
        if low >= high:
            raise ValueError(f"test '{text}': the lower limit stands first")
        return Condition(quantity, "between", low, upper=high, text=text)
    if match := _WORDS.fullmatch(text):
        return Condition(quantity, "=", words=tuple(match.group(1).split(", ")), text=text)
    raise ValueError(f"test '{text}' on {quantity} is not understood; expected {_GRAMMAR}")


def parse_near(test: Condition, text: str) -> Condition:
    """The looser test whose passing makes a failed ``test`` a near miss."""
    match = _WITHIN.fullmatch(text)
    if match is None:
        near = parse_test(test.quantity, text)
    else:
        if test.is_text or test.sign == "between":
            raise ValueError(f"near '{text}': 'within' needs a test with one limit, not '{test.text}'")
        amount, direction = float(match.group(1)), -1.0 if test.sign[0] == ">" else 1.0
        constant, slope = test.constant, test.slope
        if match.group(2):
            constant, slope = (part * (1.0 + direction * amount / 100.0) for part in (constant, slope))
        else:
            constant += direction * amount
        near = Condition(test.quantity, test.sign, constant, slope, test.of, text=f"{test.text} {text}")
    if near.sign != test.sign or near.of != test.of:
        raise ValueError(f"near '{text}' must have the form of the test '{test.text}'")
    looser = {
        ">": near.constant <= test.constant,
        "<": near.constant >= test.constant,
        "b": near.constant <= test.constant and near.upper >= test.upper,
    }.get(test.sign[0], False)
    if not looser:
        raise ValueError(f"near '{text}' is not looser than the test '{test.text}'")
    return near


def parse_conditions(text: str) -> tuple[Condition, ...]:
    """Tests with their quantities, joined by 'and': ``pd_ppm < 0.0001 and pd_pt < 3``."""
    found = []
    for part in re.split(r" and (?=[a-z])", text):
        quantity, _, rest = part.partition(" ")
        found.append(parse_test(quantity, rest))
    return tuple(found)
