"""How fast the demo job becomes a pack, from nothing and after a change (run by hand).

    python tests/benchmarks/pack.py

Prints lines of context, and ``ratio NAME VALUE`` for each figure: our time over theirs, best of
measurements that took turns in this one run.
"""

from __future__ import annotations

import json
import shutil
import subprocess
import sys
import tempfile
import time
from pathlib import Path
from typing import Any

import timing

from calcbook.job import Job, template_folder

ROUNDS = 5
TWICE = Path(__file__).with_name("pack_twice.py")


def main() -> None:
    """Measure and print every figure."""
    with tempfile.TemporaryDirectory() as folder:
        from_nothing(Path(folder))
        after_a_change(Path(folder))


def from_nothing(folder: Path) -> None:
    """Compare the pack of the demo job with its notebooks run and exported, in fresh processes."""
    job = demo_job(folder / "job")
    notebooks = [str(job / f"{name}.ipynb") for name in Job.load(job).workbooks]
    commands = {
        "pack": ["calcbook.cli", "pack", str(job), "--output", str(folder / "pack.pdf")],
        "nbconvert": ["jupyter", "nbconvert", "--execute", "--to", "html",
                      "--output-dir", str(folder), *notebooks],
    }  # fmt: skip
    best = dict.fromkeys(commands, float("inf"))
    for _ in range(ROUNDS):
        for name, words in commands.items():
            start = time.perf_counter()
            done = subprocess.run([sys.executable, "-m", *words], capture_output=True, check=False)
            best[name] = min(best[name], time.perf_counter() - start)
            if done.returncode:
                raise SystemExit(f"{' '.join(words)}\n{done.stderr.decode()}")
    size = (folder / "pack.pdf").stat().st_size
    timing.ratio("pack-vs-nbconvert", best["pack"], best["nbconvert"], 0.25,
                 f"the demo job by 'calcbook pack' ({size / 1e3:.0f} kB), against "
                 "'jupyter nbconvert --execute --to html' over the same notebooks, each from the "
                 "start of a process to its end")  # fmt: skip


def after_a_change(folder: Path) -> None:
    """Compare a pack after the wind speed changed with the first pack of the same process."""
    runs = []
    for number in range(ROUNDS):
        job = demo_job(folder / f"job-{number}")
        done = subprocess.run([sys.executable, str(TWICE), str(job)], capture_output=True,
                              check=False)  # fmt: skip
        if done.returncode:
            raise SystemExit(done.stderr.decode())
        runs.append(json.loads(done.stdout))
    first, again, same = (
        min((run[which] for run in runs), key=lambda s: s["all"])
        for which in ("first", "again", "unchanged")
    )
    imports = min(run["imports"] for run in runs)
    timing.say(
        f"where a pack from nothing goes: imports {timing.span(imports)}, then {parts(first)}"
    )
    timing.say(f"where a pack after a change goes: {parts(again)}")
    timing.say(f"where a pack with nothing changed goes: {parts(same)}")
    timing.say(
        f"against the first pack alone, imports not counted: {again['all'] / first['all']:.3g}"
    )
    timing.ratio("repack-vs-pack", again["all"], imports + first["all"], 0.33,
                 "pack_job after the wind speed changed, in the process that packed before, "
                 "against a pack from nothing: importing calcbook and the first pack_job of a "
                 "process")  # fmt: skip


def parts(seconds: dict[str, Any]) -> str:
    """Return where the time went in words; what remains is writing the pages' data."""
    rest = 2 * seconds["all"] - sum(seconds.values())
    named = {name: s for name, s in seconds.items() if name != "all"} | {"the rest": rest}
    return (f"{timing.span(seconds['all'])}, of it "
            + ", ".join(f"{name} {timing.span(s)}" for name, s in named.items()))  # fmt: skip


def demo_job(folder: Path) -> Path:
    """Make the demo job and return its folder."""
    shutil.copytree(template_folder() / "demo", folder, ignore=shutil.ignore_patterns(".*"))
    return folder


if __name__ == "__main__":
    main()
