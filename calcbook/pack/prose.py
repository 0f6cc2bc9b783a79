"""The notebook's own text, Markdown, as data for page.typ.

What the pages cannot show is refused, never dropped: HTML, pictures, TeX beyond a bare symbol.
"""

from __future__ import annotations

import re
from functools import cache
from typing import TYPE_CHECKING, Any

from calcbook.errors import PackError
from calcbook.pack.nodes import Node, symbol, words

if TYPE_CHECKING:
    from collections.abc import Iterator

    from mistune import Markdown

Token = dict[str, Any]
BARE_SYMBOL = re.compile(r"([A-Za-z]+)(?:_(?:\{([A-Za-z0-9]+)\}|([A-Za-z0-9]+)))?")
DEEPEST = 3
REFUSED = {
    "block_html": ("HTML", "write it as Markdown"),
    "inline_html": ("HTML", "write it as Markdown, or in backticks to show it as it is"),
    "image": ("a picture", "declare a figure in a section instead"),
    "block_math": ("a formula in TeX", "declare it as a line of a section"),
}


def read(markdown: str, *, below: int = 1, title: str = "") -> list[Node]:
    """Return Markdown as data for page.typ.

    Parameters
    ----------
    markdown
        Text of a notebook cell.
    below
        Level of the heading that stands before the text; headings never skip a level.
    title
        A heading of the first level with this text is left out: the workbook prints it already.

    Raises
    ------
    PackError
        For HTML, a picture, or TeX that is more than a bare symbol such as ``$K_zt$``.
    """
    tokens: list[Token] = list(_parser()(markdown))  # type: ignore[arg-type]  # no renderer: tokens
    nodes: list[Node] = []
    for token in tokens:
        if token["type"] == "heading":
            if token["attrs"]["level"] == 1 and title and _plain(token) == title.strip():
                continue
            below = min(max(2, token["attrs"]["level"]), below + 1, DEEPEST)
            nodes.append({"t": "heading", "level": below, "c": _inline(token)})
        else:
            nodes.extend(_block(token))
    return nodes


def last_level(nodes: list[Node], before: int) -> int:
    """Return the level of the last heading among the nodes, or the level before them."""
    levels = [n["level"] for n in nodes if isinstance(n, dict) and n["t"] == "heading"]
    return levels[-1] if levels else before


@cache
def _parser() -> Markdown:
    import mistune  # noqa: PLC0415  (only packs read prose)

    return mistune.create_markdown(renderer=None, plugins=["table", "math", "strikethrough"])


def _refusal(kind: str, text: str) -> PackError:
    what, hint = REFUSED.get(kind, (f"Markdown of the kind '{kind}'", "write it as plain text"))
    return PackError(
        f"the notebook's text has {what}, which cannot be printed", hint=hint, text=text
    )


def _plain(token: Token) -> str:
    own = token.get("raw", "") if "children" not in token else ""
    return own + "".join(_plain(child) for child in token.get("children", ()))


def _block(token: Token) -> Iterator[Node]:
    kind = token["type"]
    if kind in ("paragraph", "block_text"):
        yield {"t": "paragraph", "c": _inline(token)}
    elif kind == "heading":
        yield {"t": "paragraph", "c": [{"t": "strong", "c": _inline(token)}]}
    elif kind == "list":
        items = [_blocks(item) for item in token["children"]]
        if token["attrs"]["ordered"]:
            yield {"t": "numbered", "start": token["attrs"].get("start", 1), "items": items}
        else:
            yield {"t": "bullets", "items": items}
    elif kind == "block_quote":
        yield {"t": "quote", "c": _blocks(token)}
    elif kind == "block_code":
        yield {"t": "listing", "s": token["raw"].rstrip("\n")}
    elif kind == "thematic_break":
        yield {"t": "line"}
    elif kind == "table":
        yield _table(token)
    elif kind != "blank_line":
        raise _refusal(kind, _plain(token).strip())


def _blocks(token: Token) -> list[Node]:
    return [node for child in token["children"] for node in _block(child)]


def _table(token: Token) -> Node:
    head, *bodies = token["children"]
    rows = [row for body in bodies for row in body["children"]]
    return {
        "t": "grid",
        "head": [_inline(cell) for cell in head["children"]],
        "rows": [[_inline(cell) for cell in row["children"]] for row in rows],
    }


def _inline(token: Token) -> list[Node]:
    return [node for child in token.get("children", ()) for node in _piece(child)]


def _piece(token: Token) -> Iterator[Node]:
    kind = token["type"]
    if kind == "text":
        yield words(token["raw"])
    elif kind == "codespan":
        yield {"t": "code", "s": words(token["raw"])}
    elif kind in ("strong", "emphasis", "strikethrough"):
        name = {"strong": "strong", "emphasis": "emph", "strikethrough": "struck"}[kind]
        yield {"t": name, "c": _inline(token)}
    elif kind == "link":
        yield {"t": "url", "to": token["attrs"]["url"], "c": _inline(token)}
    elif kind == "softbreak":
        yield " "
    elif kind == "linebreak":
        yield {"t": "break"}
    elif kind == "inline_math":
        yield _bare_symbol(token["raw"])
    else:
        raise _refusal(kind, _plain(token).strip())


def _bare_symbol(tex: str) -> Node:
    found = BARE_SYMBOL.fullmatch(tex.strip())
    if not found:
        raise PackError(
            "the notebook's text has TeX, which cannot be printed",
            hint="declare the formula as a line; a bare symbol such as $K_zt$ may stay, "
            "and a dollar sign is written \\$",
            text=f"${tex}$",
        )
    below = found[2] or found[3]
    return symbol(f"{found[1]}_{below}" if below else found[1])
