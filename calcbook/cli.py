"""The command line: what is typed, which command does it, and what is said when it cannot be done.

Nothing here computes. A command's module is imported when the command is known to be well formed,
so that help and usage errors wait for no library.
"""

# ruff: noqa: T201  a command prints

from __future__ import annotations

import argparse
import importlib
import io
import os
import sys
from dataclasses import dataclass
from importlib import metadata
from pathlib import Path
from typing import TYPE_CHECKING, Any, NoReturn

from calcbook.errors import CalcbookError, UsageError, near_match

if TYPE_CHECKING:
    from collections.abc import Callable, Sequence

NOT_DONE = 2
INTERRUPTED = 130
READER_GONE = 141

Argument = tuple[str, dict[str, Any]]

_WORKBOOK: Argument = ("workbook", {
    "metavar": "WORKBOOK[:MARK]",
    "help": "a name (the job's copy inside a job, else the template) or a notebook's path; "
            "MARK is one of several fillings, named as on the drawings: floor-beam:B1",
})  # fmt: skip
_ROWS: Argument = ("--rows", {
    "metavar": "SCHEDULE=FILE.csv", "action": "append", "default": [],
    "help": "rows of a schedule; the first column is the key, headers may carry units",
})  # fmt: skip
_JSON: Argument = ("--json", {"action": "store_true", "help": "print JSON"})
_FOLDER: Argument = ("folder", {"metavar": "FOLDER", "type": Path, "help": "the job's folder"})


@dataclass(frozen=True)
class Command:
    """A command: the function that does it, what it says of itself, what it takes."""

    function: str
    summary: str
    arguments: tuple[Argument, ...]
    passes_on: str = ""  # the program that gets the words behind '--'

    def load(self) -> Callable[[argparse.Namespace], int]:
        """Import the function that does it."""
        module, _, name = self.function.partition(":")
        found: Callable[[argparse.Namespace], int] = getattr(
            importlib.import_module(f"calcbook.commands.{module}"), name
        )
        return found


COMMANDS = {
    "demo": Command("jobs:demo", "make the demo job and its pack", (
        ("folder", {"metavar": "FOLDER", "nargs": "?", "type": Path,
                    "default": Path("marrowick-clinic"),
                    "help": "a new folder (default: ./marrowick-clinic)"}),
    )),
    "start": Command("jobs:start", "start a new job in a new folder", (_FOLDER,)),
    "open": Command("jobs:open_job", "open a job in JupyterLab", (_FOLDER,), "JupyterLab"),
    "status": Command(
        "status:status", "show checks, and what is unconfirmed, missing or stale", (_FOLDER,)),
    "describe": Command(
        "describe:describe", "list the entries, choices, schedules and results of a workbook",
        (_WORKBOOK, _JSON)),
    "set": Command("setting:set_values", "write entries and rows into the job's record", (
        _WORKBOOK,
        ("values", {"metavar": "NAME=VALUE", "nargs": "*", "help": "an entry: V='70 m/s'"}),
        _ROWS,
        ("--source", {"metavar": "TEXT",
                      "help": "where every value and row that is set comes from"}),
        ("--confirm", {"metavar": "INITIALS",
                       "help": "confirm what is set; with nothing set, the whole workbook"}),
    )),
    "run": Command("running:run", "compute a workbook without writing anything", (
        _WORKBOOK,
        ("--set", {"metavar": "NAME=VALUE", "action": "append", "default": [],
                   "help": "an entry for this run: V='70 m/s'"}),
        _ROWS,
        ("--cases", {"metavar": "FILE.csv", "type": Path,
                     "help": "one row of entries for each case; gives one row of results each"}),
        _JSON,
    )),
    "pack": Command("jobs:pack", "make the calculation package of a job, one PDF", (
        _FOLDER,
        ("--output", {"metavar": "FILE", "type": Path,
                      "help": "where to (default: FOLDER/NUMBER-REVISION.pdf)"}),
        ("--only", {"metavar": "WORKBOOK[:MARK]",
                    "help": "print it alone; MARK is one of several"}),
    )),
}  # fmt: skip

_EXIT_STATUS = """exit status:
  0  done
  1  done, and a check is not satisfied; after demo and pack also: an item has no value
  2  refused, and nothing was written; after run and status also: printed, and something
     in it was not accepted or has no value"""


class _Parser(argparse.ArgumentParser):
    """A parser whose refusals are raised, so that every command refuses in the same way."""

    def error(self, message: str) -> NoReturn:
        raise UsageError(message, hint=f"see: {self.prog} --help")


def main(argv: Sequence[str] | None = None) -> int:
    """Do what a command line says.

    Parameters
    ----------
    argv
        The words after ``calcbook``; by default those of this process.

    Returns
    -------
    int
        The exit status: 0 done; 1 done, and a check is not satisfied (a package also: an item
        has no value); 2 refused, with one message on standard error, or printed by ``run`` and
        ``status`` with something that was not accepted; 130 interrupted.
    """
    words = list(sys.argv[1:] if argv is None else argv)
    _never_stop_at_a_sign()
    try:
        status = _do(words)
        sys.stdout.flush()
    except CalcbookError as error:
        return _say(str(error))
    except KeyboardInterrupt:
        return INTERRUPTED
    except BrokenPipeError:
        _drop_output()
        return READER_GONE
    except Exception as error:  # noqa: BLE001  a traceback helps nobody at the desk
        return _say(_unexpected(error))
    return status


def _do(words: Sequence[str]) -> int:
    if not words or words[0] in {"-h", "--help"}:
        print(_overview())
        return 0
    if words[0] == "--version":
        print(f"calcbook {metadata.version('calcbook')}")
        return 0
    command, parser = _command(words[0])
    own, passed = list(words[1:]), []
    if command.passes_on and "--" in own:
        own, passed = own[: own.index("--")], own[own.index("--") + 1 :]
    try:
        arguments, rest = parser.parse_known_intermixed_args(own)
    except SystemExit:  # help was asked for and printed
        return 0
    arguments.passed = passed
    if rest:
        options = [name for name, _ in command.arguments if name.startswith("--")]
        _refuse_rest(rest[0], parser, options)
    return command.load()(arguments)


def _command(word: str) -> tuple[Command, _Parser]:
    if word not in COMMANDS:
        what = f"there is no option '{word}'" if word.startswith("-") else f"no command '{word}'"
        raise UsageError(
            what,
            hint=near_match(word, [*COMMANDS, "--help", "--version"])
            or f"there are: {', '.join(COMMANDS)}",
        )
    command = COMMANDS[word]
    about = f"{command.summary[0].upper()}{command.summary[1:]}."
    if command.passes_on:
        about += f" Options behind '--' are passed on to {command.passes_on}."
    parser = _Parser(
        prog=f"calcbook {word}", description=about,
        epilog=_EXIT_STATUS, allow_abbrev=False,
        formatter_class=argparse.RawDescriptionHelpFormatter,
    )  # fmt: skip
    for name, described in command.arguments:
        parser.add_argument(name, **described)
    return command, parser


def _refuse_rest(word: str, parser: _Parser, options: Sequence[str]) -> NoReturn:
    kind = "option" if word.startswith("-") else "further word"
    hint = near_match(word, options) if kind == "option" else ""
    raise UsageError(f"{parser.prog} takes no {kind} '{word}'",
                     hint=hint or f"see: {parser.prog} --help")  # fmt: skip


def _overview() -> str:
    width = max(map(len, COMMANDS)) + 2
    lines = [f"  {name:<{width}}{command.summary}" for name, command in COMMANDS.items()]
    return "\n".join([
        "usage: calcbook COMMAND ...", "",
        "Workbooks for structural load calculations: formulas with their values, units checked,",
        "one PDF a reviewer can follow.", "", "commands:", *lines, "",
        "calcbook COMMAND --help says more of one; calcbook --version prints the version.", "",
        _EXIT_STATUS,
    ])  # fmt: skip


def _say(message: str) -> int:
    print(f"calcbook: {message}", file=sys.stderr)
    return NOT_DONE


def _unexpected(error: Exception) -> str:
    """Return what is said of an error nobody foresaw: what, where in the program, what now."""
    trace = error.__traceback__
    while trace is not None and trace.tb_next is not None:
        trace = trace.tb_next
    place = ""
    if trace is not None:
        place = f" in {Path(trace.tb_frame.f_code.co_filename).name}, line {trace.tb_lineno}"
    text = " ".join(str(error).split())
    return (
        f"stopped unexpectedly: {type(error).__name__}: {text}\n"
        "look at the job's folder before going on; please report this line "
        f"(calcbook {metadata.version('calcbook')}{place}) with the command you typed"
    )


def _never_stop_at_a_sign() -> None:
    """Let a terminal that has no ² or · show '?' there instead of ending the command."""
    for stream in (sys.stdout, sys.stderr):
        if isinstance(stream, io.TextIOWrapper):
            stream.reconfigure(errors="replace")


def _drop_output() -> None:
    """Send what is still to be printed nowhere, because its reader (``| head``) has left."""
    nowhere = os.open(os.devnull, os.O_WRONLY)
    os.dup2(nowhere, sys.stdout.fileno())
    os.close(nowhere)


if __name__ == "__main__":
    sys.exit(main())
