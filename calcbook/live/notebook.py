"""The kernel a notebook runs in, as far as calcbook needs to know it."""

from __future__ import annotations

import os
from pathlib import Path
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from collections.abc import Callable, Mapping

WIDGET = "application/vnd.jupyter.widget-view+json"
_SESSION = "JPY_SESSION_NAME"
_FRONT_ENDS = (_SESSION, "VSCODE_PID")


def shell() -> Any:  # noqa: ANN401  IPython has no types
    """Return the IPython shell this code runs in, or None in plain Python."""
    try:
        from IPython import get_ipython  # noqa: PLC0415  plain Python may do without
    except ImportError:
        return None
    return get_ipython()


def has_widgets() -> bool:
    """Whether a person looks at this kernel through a front end that shows widgets."""
    in_kernel = getattr(shell(), "kernel", None) is not None
    return in_kernel and any(os.environ.get(name) for name in _FRONT_ENDS)


def path(workbook: str) -> Path:
    """Return the path of the notebook that runs; by the workbook's name where nobody says."""
    named = os.environ.get(_SESSION, "")
    return Path(named) if named.endswith(".ipynb") else Path.cwd() / f"{workbook}.ipynb"


def stamp(statement: Mapping[str, Any], section: str) -> dict[str, Any]:
    """Return the metadata of an output: what it shows of which filling, and its fingerprint."""
    return {"calcbook": {
        "fingerprint": statement["fingerprint"], "mark": statement["mark"], "section": section,
    }}  # fmt: skip


def publish(bundle: Mapping[str, Any], metadata: Mapping[str, Any] | None = None) -> None:
    """Show a bundle of forms of one output; plain Python prints its plain text.

    A widget is an output of its own after the others, so that a file opened without its kernel
    still shows the calculation; the widget takes the other one out of sight while it lives.
    """
    if shell() is None:
        print(bundle["text/plain"])  # noqa: T201  there is nothing else to show it with
        return
    from IPython.display import publish_display_data  # noqa: PLC0415  see above

    still = {kind: form for kind, form in bundle.items() if kind != WIDGET}
    publish_display_data(still, dict(metadata or {}))  # type: ignore[no-untyped-call]
    if WIDGET in bundle:
        publish_display_data({WIDGET: bundle[WIDGET]})  # type: ignore[no-untyped-call]


def widget_view(model: str) -> dict[str, Any]:
    """Return what shows a widget, by the id of its model."""
    return {"version_major": 2, "version_minor": 0, "model_id": model}


def publish_widget(model: str) -> None:
    """Show a widget alone, as an output of its own."""
    from IPython.display import publish_display_data  # noqa: PLC0415  see above

    publish_display_data({WIDGET: widget_view(model)})  # type: ignore[no-untyped-call]


def running() -> tuple[str, tuple[str, ...]]:
    """Return the id of the cell that runs and those deleted since the last one ran."""
    kernel = getattr(shell(), "kernel", None)
    parent = kernel.get_parent("shell") if kernel is not None else None
    metadata = (parent or {}).get("metadata", {})
    return str(metadata.get("cellId") or ""), tuple(metadata.get("deletedCells") or ())


def watch(started: Callable[[], None]) -> None:
    """Call a function before every cell that runs."""
    found = shell()
    if found is not None:
        found.events.register("pre_run_cell", lambda _info: started())
