"""A reader of printed MathML: the value a person would get from what is on the page.

``mrow`` is not seen on paper, so its grouping does not count: only brackets, fractions, roots and
raised parts hold things together. A lost bracket therefore changes the value.
"""

# ruff: noqa: RUF001  true signs are what is read

from __future__ import annotations

import math
import xml.etree.ElementTree as ET
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

Tokens = list[ET.Element]
_TIMES = {"⋅", "×", "\u2062"}
_RELATIONS: dict[str, Callable[[float, float], bool]] = {
    "<": lambda a, b: a < b,
    "≤": lambda a, b: a <= b,
    ">": lambda a, b: a > b,
    "≥": lambda a, b: a >= b,
    "=": lambda a, b: a == b,
    "≠": lambda a, b: a != b,
}
_FUNCTIONS: dict[str, Callable[..., float]] = {
    "min": min,
    "max": max,
    "arctan": math.atan,
    "exp": math.exp,
}


def read(mathml: str, symbols: Mapping[str, float]) -> float:
    """Return the value of printed MathML; ``symbols`` are values by printed symbol."""
    root = ET.fromstring(f"<math>{mathml}</math>")  # noqa: S314  our own output
    return _Reader(_flat(root), symbols).whole()


def _flat(element: ET.Element) -> Tokens:
    tokens: Tokens = []
    for child in element:
        if child.tag == "mrow":
            tokens += _flat(child)
        elif child.tag != "mspace":
            tokens.append(child)
    return tokens


def _alone(element: ET.Element) -> Tokens:
    holder = ET.Element("math")
    holder.append(element)
    return _flat(holder)


class _Reader:
    """Reads tokens with the precedence of the page."""

    def __init__(self, tokens: Tokens, symbols: Mapping[str, float]) -> None:
        self.tokens = tokens
        self.symbols = symbols
        self.at = 0

    def whole(self) -> float:
        result = self.condition()
        assert self.at == len(self.tokens), "something is left over"
        return result

    def part(self, element: ET.Element) -> float:
        return _Reader(_alone(element), self.symbols).whole()

    def sign(self) -> str:
        if self.at >= len(self.tokens) or self.tokens[self.at].tag not in {"mo", "mtext"}:
            return ""
        return (self.tokens[self.at].text or "").strip("\xa0 ")

    def take(self, *signs: str) -> str:
        found = self.sign()
        if found and found in signs:
            self.at += 1
            return found
        return ""

    def condition(self) -> float:
        result = self.conjunction()
        while self.take("or"):
            result = float(self.conjunction() or result)
        return result

    def conjunction(self) -> float:
        result = self.negation()
        while self.take("and"):
            result = float(self.negation() and result)
        return result

    def negation(self) -> float:
        if self.take("not"):
            return float(not self.negation())
        left = self.sum()
        held, chained = True, False
        while sign := self.take(*_RELATIONS):
            right = self.sum()
            held, chained = held and _RELATIONS[sign](left, right), True
            left = right
        return float(held) if chained else left

    def sum(self) -> float:
        result = -self.product() if self.take("−") else self.product()
        while sign := self.take("+", "−"):
            other = self.product()
            result = result + other if sign == "+" else result - other
        return result

    def product(self) -> float:
        result = self.factor()
        while sign := self.take(*_TIMES, "/"):
            other = self.factor()
            result = result / other if sign == "/" else result * other
        return result

    def factor(self) -> float:  # noqa: PLR0911  one case per mark
        if self.take("("):
            return self.closed(")")
        if self.take("|"):
            return abs(self.closed("|"))
        if self.take("{"):
            return self.cases()
        token = self.tokens[self.at]
        self.at += 1
        if token.tag == "mn":
            return float((token.text or "").replace("−", "-"))
        if token.tag == "mfrac":
            return self.part(token[0]) / self.part(token[1])
        if token.tag == "msqrt":
            return math.sqrt(_Reader(_flat(token), self.symbols).whole())
        if token.tag == "msup":
            base = _Reader(_alone(token[0]), self.symbols)
            value = base.factor()
            assert base.at == len(base.tokens), "a raised part stands on more than one factor"
            return math.pow(value, self.part(token[1]))
        if self.take("\u2061"):
            return self.function(token.text or "")
        return self.symbols[ET.tostring(token, encoding="unicode")]

    def closed(self, bracket: str) -> float:
        result = self.condition()
        assert self.take(bracket), "a bracket does not close"
        return result

    def function(self, name: str) -> float:
        assert self.take("(")
        values = [self.condition()]
        while self.take(","):
            values.append(self.condition())
        assert self.take(")")
        return _FUNCTIONS[name](*values)

    def cases(self) -> float:
        table = self.tokens[self.at]
        self.at += 1
        (yes, test), (no, _) = table
        condition = _Reader([t for t in _flat(test) if (t.text or "") != "if\xa0"], self.symbols)
        return _Reader(_flat(yes if condition.whole() else no), self.symbols).whole()
