"""The tree of a formula: its node classes, its functions, and ways to walk it."""

from __future__ import annotations

from dataclasses import dataclass, field
from typing import TYPE_CHECKING

if TYPE_CHECKING:
    from collections.abc import Iterator

#: Every function of the language, with the fewest and the most values it takes (None: any number).
FUNCTIONS: dict[str, tuple[int, int | None]] = {
    "abs": (1, 1),
    "acos": (1, 1),
    "asin": (1, 1),
    "atan": (1, 1),
    "ceil": (1, 1),
    "cos": (1, 1),
    "exp": (1, 1),
    "floor": (1, 1),
    "following": (2, 2),
    "interpolate": (2, 3),
    "ln": (1, 1),
    "log10": (1, 1),
    "lookup": (3, 3),
    "max": (1, None),
    "min": (1, None),
    "previous": (2, 2),
    "running": (1, 1),
    "sin": (1, 1),
    "sqrt": (1, 1),
    "sum": (1, 1),
    "sum_for": (3, 3),
    "tan": (1, 1),
    "where": (3, 3),
}


@dataclass(frozen=True, slots=True, kw_only=True)
class _Part:
    """What every node has: its (start, end) in the text, which does not count in comparisons."""

    span: tuple[int, int] = field(default=(0, 0), compare=False)


@dataclass(frozen=True, slots=True)
class Number(_Part):
    """A plain number, with the text as typed: ``2.50`` stays ``2.50``."""

    text: str
    value: float


@dataclass(frozen=True, slots=True)
class Quoted(_Part):
    """A quoted text: a quantity (``'4.6 m'``) or an option of a choice (``'gable'``)."""

    text: str


@dataclass(frozen=True, slots=True)
class Name(_Part):
    """A symbol declared elsewhere."""

    name: str


@dataclass(frozen=True, slots=True)
class Negative(_Part):
    """A leading minus."""

    operand: Node


@dataclass(frozen=True, slots=True)
class Binary(_Part):
    """``+``, ``-``, ``*``, ``/`` or ``**`` of two operands."""

    op: str
    left: Node
    right: Node


@dataclass(frozen=True, slots=True)
class Call(_Part):
    """One of `FUNCTIONS` with its values."""

    function: str
    args: tuple[Node, ...]


@dataclass(frozen=True, slots=True)
class Compare(_Part):
    """A comparison, or a chain of them: ``a < b <= c``."""

    first: Node
    rest: tuple[tuple[str, Node], ...]


@dataclass(frozen=True, slots=True)
class Logic(_Part):
    """``and`` or ``or`` between two or more parts."""

    op: str
    parts: tuple[Node, ...]


@dataclass(frozen=True, slots=True)
class Not(_Part):
    """``not`` of one part."""

    operand: Node


@dataclass(frozen=True, slots=True)
class Solve(_Part):
    """A solver at work: (role, load case or '', symbol) for all that it takes; no formula text.

    ``conditions`` are those under which a symbol applies at all, where the solver does without it.
    """

    solver: str
    takes: tuple[tuple[str, str, Name], ...]
    conditions: tuple[tuple[str, Node], ...] = ()


@dataclass(frozen=True, slots=True)
class Found(_Part):
    """An outcome of a solver; ``rows`` is the set of rows it runs over, None for one value."""

    solution: Name
    outcome: str
    case: str
    rows: str | None


Node = Number | Quoted | Name | Negative | Binary | Call | Compare | Logic | Not | Solve | Found


def names(node: Node) -> tuple[str, ...]:
    """Return the symbols of a tree in order of first appearance, without function names."""
    return tuple(dict.fromkeys(part.name for part in walk(node) if isinstance(part, Name)))


def walk(node: Node) -> Iterator[Node]:
    """Yield a node and everything below it, in the order of the text."""
    yield node
    for child in children(node):
        yield from walk(child)


def children(node: Node) -> tuple[Node, ...]:  # noqa: PLR0911  one case per kind of node
    """Return the parts directly below a node, in the order of the text."""
    match node:
        case Binary(left=left, right=right):
            return (left, right)
        case Negative(operand=operand) | Not(operand=operand):
            return (operand,)
        case Call(args=parts) | Logic(parts=parts):
            return parts
        case Compare(first=first, rest=rest):
            return (first, *(part for _, part in rest))
        case Solve(takes=takes, conditions=conditions):
            return (*(part for _, _, part in takes), *(test for _, test in conditions))
        case Found(solution=solution):
            return (solution,)
        case _:
            return ()


#: Functions that find rows of another schedule by their key: (column, its keys, the key wanted).
KEYED = frozenset({"lookup", "sum_for"})


def gathers(node: Node) -> bool:
    """Whether a call works on whole columns: its value in one row depends on other rows."""
    if isinstance(node, Solve):
        return True
    if not isinstance(node, Call):
        return False
    if node.function in {"min", "max"}:
        return len(node.args) == 1
    return node.function in {"sum", "running", "previous", "following"}


def gathered(node: Node) -> tuple[str, ...]:
    """Return the symbols that stand inside such a call, in order of first appearance."""
    inner = (name for part in walk(node) if gathers(part) for name in names(part))
    return tuple(dict.fromkeys(inner))


def accumulated(node: Node) -> frozenset[str]:
    """Return the symbols that are gathered by ``running`` alone: a row needs those before it."""
    calls = [part for part in walk(node) if gathers(part)]
    running = {
        n for c in calls if isinstance(c, Call) and c.function == "running" for n in names(c)
    }
    others = (c for c in calls if isinstance(c, Call) and c.function != "running")
    return frozenset(running - {name for call in others for name in names(call)})
