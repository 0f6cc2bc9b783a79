"""Reading the tables of a code set from the data files of the package."""

from __future__ import annotations

import tomllib
from importlib import resources
from typing import TYPE_CHECKING, Any

from calcbook.table import Axis, Table
from calcbook.units import unit

if TYPE_CHECKING:
    from collections.abc import Mapping


def read_tables(file: str, sources: Mapping[str, str]) -> tuple[dict[str, Table], dict[str, Table]]:
    """Read a data file of tables, each under its subject.

    Parameters
    ----------
    file
        The name of a TOML file of ``calcbook/codes/data``.
    sources
        Edition and number of each table, by subject.

    Returns
    -------
    tuple
        The tables as printed in SI, and those printed differently in US customary units.
    """
    text = resources.files("calcbook.codes").joinpath("data", file).read_text(encoding="utf-8")
    printed = tomllib.loads(text)
    tables = {subject: _table(part, sources[subject]) for subject, part in printed.items()}
    tables_us = {
        subject: _table({**part, **part["us"]}, sources[subject])
        for subject, part in printed.items()
        if "us" in part
    }
    return tables, tables_us


def _table(part: Mapping[str, Any], source: str) -> Table:
    return Table(
        name=part["title"],
        axes=tuple(
            Axis(name=axis["name"], unit=unit(axis.get("unit", "")), points=tuple(axis["points"]))
            for axis in part["axes"]
        ),
        values=tuple(tuple(v) if isinstance(v, list) else v for v in part["values"]),
        unit=unit(part.get("unit", "")),
        outside=part["outside"],
        source=source,
        from_memory=part.get("from_memory", False),
    )
