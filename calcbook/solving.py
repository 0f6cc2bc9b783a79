"""A solver of a workbook bound: its roles filled by names of the right kind, its outcomes typed."""

from __future__ import annotations

from typing import TYPE_CHECKING

from calcbook import solvers, units
from calcbook.dimensions import Type
from calcbook.errors import DeclarationError, near_match
from calcbook.signatures import a_kind
from calcbook.tree import Found, Name, Solve

if TYPE_CHECKING:
    from collections.abc import Callable, Iterator, Mapping

    from calcbook.items import Solved, Solver
    from calcbook.solvers import Role


def bind(item: Solver, scope: Mapping[str, Type], look_up: Callable[[str], Name]) -> Solve:
    """Return a solver with its roles filled.

    Raises DeclarationError for a role that is unknown, lacks, or is filled by the wrong kind.
    """
    solver = solvers.find(item.by)
    for role in item.takes:
        if role not in solver.roles:
            raise DeclarationError(
                f"the solver {solver.name} takes no '{role}'",
                hint=near_match(role, solver.roles) or f"it takes {', '.join(solver.roles)}",
            )
    for role, told in solver.roles.items():
        if role not in item.takes and not told.optional:
            hint = f"give it in takes={{'{role}': name}}: {told.meaning.lower()}"
            raise DeclarationError(f"the solver {solver.name} lacks its '{role}'", hint=hint)
    takes = tuple((role, case, look_up(name)) for role, case, name in filled(item))
    sets: dict[str, str] = {}
    for role, _, name in takes:
        wanted = _wanted(solver.roles[role], item, scope)
        _refuse_unlike(role, wanted, name.name, scope[name.name])
        _refuse_other_rows(solver.roles[role], name.name, scope[name.name], sets)
    return Solve(solver.name, takes)


def may_idle(item: Solver) -> tuple[str, ...]:
    """Return the names a solver takes and does without where they do not apply."""
    roles = solvers.find(item.by).roles
    return tuple(name for role, _, name in filled(item) if roles[role].may_idle)


def _wanted(told: Role, item: Solver, scope: Mapping[str, Type]) -> Type:
    """Return the type a role is to be filled with, without its rows."""
    if told.kind == "text":
        return Type("text", None, None)
    dimension = _any(item, scope) if told.kind == "any" else units.KINDS[told.kind].dimension
    return Type("number", dimension, None)


def _any(item: Solver, scope: Mapping[str, Type]) -> units.Dimension | None:
    """Return the dimension of the first name in a role of any kind."""
    roles = solvers.find(item.by).roles
    return next(scope[n].dimension for role, _, n in filled(item) if roles[role].kind == "any")


def filled(item: Solver) -> Iterator[tuple[str, str, str]]:
    """Yield (role, load case or '', name) of everything a solver takes."""
    for role, names in item.takes.items():
        by_case = solvers.find(item.by).roles[role].by_case
        if isinstance(names, str) == by_case:
            hint = "{'D': name, 'L': name}" if by_case else "a single name"
            raise DeclarationError(f"'{role}' is not filled as it should be", hint=f"give {hint}")
        if isinstance(names, str):
            yield role, "", names
        else:
            yield from ((role, case, name) for case, name in names.items())


def _refuse_unlike(role: str, wanted: Type, name: str, found: Type) -> None:
    if found.form != wanted.form or found.dimension != wanted.dimension:
        raise DeclarationError(
            f"{name} is {a_kind(found)}, and '{role}' of the solver is to be {a_kind(wanted)}"
        )


def _refuse_other_rows(told: Role, name: str, found: Type, sets: dict[str, str]) -> None:
    """Refuse a column for a value, or one of other rows; ``sets`` are the rows known so far."""
    if bool(told.rows) != (found.rows is not None):
        shape = "a column" if told.rows else "a single value"
        raise DeclarationError(f"{told.meaning.lower()} is to be {shape}, and {name} is not")
    if found.rows is not None and sets.setdefault(told.rows, found.rows) != found.rows:
        raise DeclarationError(
            f"{name} runs over the rows of {found.rows}, and what else belongs to "
            f"'{told.rows}' over those of {sets[told.rows]}"
        )


def bind_found(
    item: Solved, solver_item: Solver, rows: str | None, scope: Mapping[str, Type]
) -> tuple[Found, Type]:
    """Return an outcome of a solver bound, and its type.

    Raises DeclarationError for an unknown outcome or case, and for rows that are not the
    outcome's.
    """
    solver = solvers.find(solver_item.by)
    told = solver.outcomes.get(item.outcome)
    if told is None:
        hint = near_match(item.outcome, solver.outcomes) or f"it gives {', '.join(solver.outcomes)}"
        raise DeclarationError(f"the solver {solver.name} gives no '{item.outcome}'", hint=hint)
    cases = dict.fromkeys(case for _, case, _ in filled(solver_item) if case)
    if told.by_case and item.case not in cases:
        hint = near_match(item.case, cases) or f"its cases are {', '.join(cases)}"
        raise DeclarationError(f"the solver knows no case '{item.case}'", hint=hint)
    if item.case and not told.by_case:
        raise DeclarationError(f"'{item.outcome}' is not asked for a case")
    over = row_sets(solver_item, scope).get(told.rows) if told.rows else None
    if over != rows:
        where = f"in a schedule with the rows of {over}" if over else "outside a schedule"
        raise DeclarationError(f"'{item.outcome}' is declared {where}", hint="or same_rows=")
    if told.kind == "text":
        kind = Type("text", None, rows)
    else:
        any_kind = told.kind == "any"
        dimension = _any(solver_item, scope) if any_kind else units.KINDS[told.kind].dimension
        kind = Type("number", dimension, rows)
    return Found(Name(item.of), item.outcome, item.case, rows), kind


def row_sets(item: Solver, scope: Mapping[str, Type]) -> dict[str, str]:
    """Return the rows of the workbook behind each set of rows a solver speaks of."""
    roles = solvers.find(item.by).roles
    found = {roles[role].rows: scope[name].rows for role, _, name in filled(item)}
    return {label: rows for label, rows in found.items() if label and rows is not None}


def kind(item: Solved, solver_item: Solver, found: Type) -> units.Kind:
    """Return the kind of quantity an outcome is shown as."""
    name = solvers.find(solver_item.by).outcomes[item.outcome].kind
    if name != "any":
        return units.KINDS[name]
    return next(k for k in units.KINDS.values() if k.dimension == found.dimension)


def words(item: Solved, solver_item: Solver) -> str:
    """Return what an outcome is, in words: 'reaction, case D'."""
    told = solvers.find(solver_item.by).outcomes[item.outcome].meaning
    return f"{told}, case {item.case}" if item.case else told
