"""Live loads by use, as the editions list them."""

from __future__ import annotations

import tomllib
from dataclasses import dataclass
from importlib import resources


@dataclass(frozen=True, kw_only=True)
class Use:
    """The least live load of one use.

    Attributes
    ----------
    name, words
        The key, alike in every edition that lists the use, and the use in words.
    load, load_us
        Least uniform live load as a quantity in text, as the code prints it in SI and in US
        customary units; a metric code prints one only, which then serves for both.
    reducible
        'yes'; 'no'; 'heavy', over 4.8 kPa (100 psf); 'garage'; 'assembly'.
    clause
        Edition and number, as printed in the margin.
    from_memory
        The load has not been read in a published source and is to be confirmed.
    """

    name: str
    words: str
    load: str
    load_us: str
    reducible: str
    clause: str
    from_memory: bool


def read_uses(edition: str, clause: str) -> dict[str, Use]:
    """Return the uses that an edition lists, by name, in the order of the data file."""
    file = resources.files("calcbook.codes").joinpath("data", "uses.toml")
    listed = tomllib.loads(file.read_text(encoding="utf-8"))
    return {
        name: Use(
            name=name,
            words=use["words"],
            load=use[edition]["load"],
            load_us=use[edition].get("us", use[edition]["load"]),
            reducible=use["reducible"],
            clause=clause,
            from_memory=not use[edition].get("read", False),
        )
        for name, use in listed.items()
        if edition in use
    }
