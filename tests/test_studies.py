"""Studies of schedules and checks, the picture, and both studies on the demo job's workbooks."""

from __future__ import annotations

from typing import TYPE_CHECKING

import numpy as np
import pytest
from books import TEMPLATES, book, lines
from studied import effect, recomputed, slope, study

from calcbook import studies
from calcbook.errors import DeclarationError, InputError
from calcbook.job import Job
from calcbook.run import Filling, Runner
from calcbook.units import read_quantity, unit

if TYPE_CHECKING:
    from collections.abc import Callable

    from calcbook.workbook import Workbook

EXACT = 1e-12
MET = 1e-9


@pytest.fixture(scope="module")
def demo() -> Callable[[str, str | None], Workbook]:
    """Return a function that gives an evaluated workbook of the demo job."""
    job = Job.load(TEMPLATES / "demo")
    runner = Runner(job)
    done: dict[tuple[str, str | None], Workbook] = {}

    def run(name: str, mark: str | None = None) -> Workbook:
        if (name, mark) not in done:
            done[name, mark] = runner.run(Filling(job.notebook(name), mark))[0]
        return done[name, mark]

    return run


# --- schedules, checks, what can be chosen --------------------------------------------------------


def loads() -> Workbook:
    """Return a workbook with a schedule, checks, and an entry that is not applied."""
    workbook = book()
    with workbook.section("Loads") as s:
        s.entry("q", "Pressure", "2 kPa", unit="pressure", low="0 kPa")
        s.choice("use", "Use", ["office", "store"], "office")
        s.entry("q_s", "Pressure of goods", "5 kPa", unit="pressure", when="use == 'store'")
        with s.schedule(
            "floors",
            "Floors",
            heading="Floor",
            rows=[{"key": "L2", "A": "100 m2"}, {"key": "L1", "A": "150 m2"}],
        ) as t:
            t.entry("A", "Area", unit="area", low="1 m2")
            t.line("W = q*A", "Weight", unit="force", result=True)
            t.total("W")
            t.governing("W", "largest")
            t.governing("W", "smallest")
        s.line("W_all = sum(W)", "All floors", unit="force", result=True)
        s.check("W_all <= '400 kN'", "Footing")
        s.check("W >= '150 kN'", "Each floor")
        s.check("use == 'office'", "Use")
    workbook.evaluate()
    return workbook


def test_what_can_be_chosen() -> None:
    """Lines, ratios of checks, totals and governing rows, with their values as printed."""
    found = {one.id: one for one in studies.results(loads())}
    assert list(found) == ["W total", "W largest", "W smallest", "W_all", "1.6", "1.7"]
    assert found["W total"].text == found["W_all"].text == "500.0 kN"
    assert found["W largest"].si == pytest.approx(300e3)
    assert (found["1.6"].text, found["1.6"].relation) == ("1.25", "<=")
    assert found["1.7"].si == pytest.approx(0.75)
    assert found["W_all"].declared


def test_columns_are_varied_as_a_whole() -> None:
    """Every row of a column is varied by one part; its derivative is per percent."""
    found = study(loads(), "W total")
    answer = effect(found, "A")
    assert (answer.entry.kind, answer.entry.text) == ("column", "2 rows")
    assert slope(found, "A") == pytest.approx(500e3, rel=1e-9)
    assert answer.slopes[0].text == "5.000 kN per 1 % of every row"
    assert answer.high.si == pytest.approx(550e3)
    assert {one.entry.name for one in found.effects} == {"A", "q"}


def test_governing_rows() -> None:
    """The largest and the smallest row answer with their own areas."""
    assert slope(study(loads(), "W largest"), "q") == pytest.approx(150.0, rel=1e-9)
    assert slope(study(loads(), "W smallest"), "q") == pytest.approx(100.0, rel=1e-9)


def test_ratio_of_a_check_and_its_verdict() -> None:
    """The ratio is studied, and the verdict told with 10 % less and more."""
    found = study(loads(), "1.6")
    answer = effect(found, "q")
    assert slope(found, "q") == pytest.approx(250 / 400e3, rel=1e-9)
    assert (answer.low.text, answer.low.satisfied) == ("1.13", False)
    rows = study(loads(), "1.7")
    # 150 kN over the lighter floor of 200 kN
    assert slope(rows, "q") == pytest.approx(-150e3 / 100 / 2e3**2, rel=1e-8)
    assert effect(rows, "q").low.satisfied is True


def test_closed_form_of_a_ratio() -> None:
    """Both sides of a check may depend on an entry."""
    workbook = book()
    with workbook.section("Trial") as s:
        s.entry("b", "Width", "3 m", unit="length")
        s.line("M = b*'2 kN'", "Demand", unit="moment")
        s.line("R = b**2*'1 kPa'*'1 m'", "Limit", unit="moment")
        s.check("M <= R", "Strength")
    found = study(workbook, "1.4")
    assert effect(found, "b").way == "closed form"
    assert slope(found, "b") == pytest.approx(-2 / 9, rel=EXACT)


def test_refused_results() -> None:
    """An unknown result gives the nearest; one without a value gives the reason."""
    with pytest.raises(InputError, match="there is no result 'W_al'") as caught:
        studies.sensitivity(loads(), "W_al")
    assert caught.value.hint == "did you mean 'W_all'?"
    with pytest.raises(InputError, match=r"1\.8 has no value to study") as caught:
        studies.sensitivity(loads(), "1.8")
    assert "compares a demand with a limit" in caught.value.hint
    broken = lines("y = 1/x", entries={"x": "0"})
    broken.evaluate()
    with pytest.raises(InputError, match="y has no value to study") as caught:
        studies.sensitivity(broken, "y")
    assert "division by zero" in caught.value.hint


def test_missing_input_elsewhere_stops_nothing() -> None:
    """A result is studied although another line has no value."""
    workbook = lines("a = 2*x", "b = 1/y", entries={"x": "3", "y": ""})
    assert slope(study(workbook, "a"), "x") == 2.0


def test_a_study_changes_nothing() -> None:
    """Statement, readings and results are the same after studies of every result."""
    workbook = loads()
    before, results = workbook.statement(), workbook.results
    for one in studies.results(workbook):
        studies.sensitivity(workbook, one.id)
    assert workbook.results is results
    assert workbook.statement() == before


# --- the picture ----------------------------------------------------------------------------------


def test_picture() -> None:
    """The bars are drawn as PNG and SVG, with the results written beside them, not by colour."""
    found = study(loads(), "W_all")
    assert studies.draw(found).startswith(b"\x89PNG")
    words = studies.draw(found, "svg").decode()
    for text in ("10 % less", "10 % more", "W_all = 500.0 kN", "550.0 kN (+10.0 %)", "q = 2 kPa"):
        assert text in words
    assert studies.draw(found, "svg") == studies.draw(found, "svg")
    assert "q = 2 kPa: 450.0 kN (\N{MINUS SIGN}10.0 %) with less" in studies.describe(found)
    with pytest.raises(DeclarationError, match="cannot be drawn as 'pdf'"):
        studies.draw(found, "pdf")


def test_picture_without_bars() -> None:
    """A result that nothing moves is told in words."""
    found = study(lines("y = 3", "z = 0*x + 1", entries={"x": "2"}), "z")
    assert "No change with: x." in studies.draw(found, "svg").decode()


# --- the workbooks there are ----------------------------------------------------------------------


def test_wind_goes_with_the_square_of_the_speed(demo: Callable[..., Workbook]) -> None:
    """Base shear, velocity pressure and uplift have the derivative 2 R/V to the speed V."""
    wind = demo("wind-pressure")
    speed = wind.readings.values["V"]
    for name, way in {"V_max": "numeric", "q_h": "closed form", "N_min": "numeric"}.items():
        found = studies.sensitivity(wind, name)
        assert effect(found, "V").way == way
        assert slope(found, "V") == pytest.approx(2 * found.result.si / speed, rel=1e-9)


def test_roof_slope_at_a_point_of_the_table_is_a_kink(demo: Callable[..., Workbook]) -> None:
    """The demo's roof of 15 deg stands on a point of the wind tables: two derivatives."""
    answer = effect(studies.sensitivity(demo("wind-pressure"), "V_max"), "theta")
    assert [one.side for one in answer.slopes] == ["below", "above"]


def test_column_load(demo: Callable[..., Workbook]) -> None:
    """N_u = 1.2 D + E + f_1 L: the unit weight of the column counts with its volume and 1.2."""
    column = demo("column-accumulation", "C-3")
    found = studies.sensitivity(column, "N_u")
    values = column.results.values
    volume = float(np.sum(np.asarray(values["A_c"]) * np.asarray(values["l_c"])))
    assert slope(found, "gamma_c") == pytest.approx(1.2 * volume, rel=1e-8)


@pytest.mark.parametrize(
    ("name", "mark"),
    [
        ("design-basis", None),
        ("dead-load-take-off", None),
        ("wind-pressure", None),
        ("column-accumulation", "C-3"),
        ("column-schedule", None),
    ],
)
def test_every_workbook(demo: Callable[..., Workbook], name: str, mark: str | None) -> None:
    """Each derivative of each declared result agrees with a plain difference of two runs."""
    workbook = demo(name, mark)
    declared = [one for one in studies.results(workbook) if one.declared and " " not in one.id]
    assert declared
    for one in declared:
        found = studies.sensitivity(workbook, one.id)
        assert found.result.si == workbook.results.values[one.name]
        for answer in found.effects:
            if answer.entry.kind == "column" or len(answer.slopes) != 1 or answer.slopes[0].side:
                continue
            start = workbook.readings.values[answer.entry.name]
            step = 1e-6 * (abs(start) or 1.0)
            ends = [run(workbook, one.name, {answer.entry.name: start + s}) for s in (-step, step)]
            plain = (ends[1] - ends[0]) / (2 * step)
            noise = 1e-9 * abs(one.si) / step
            assert answer.slopes[0].si == pytest.approx(plain, rel=1e-5, abs=noise), answer


def run(workbook: Workbook, name: str, changes: dict[str, float]) -> float:
    """Return a line of a workbook evaluated with other values."""
    readings = workbook.readings
    values = {**readings.values, **changes}
    found = workbook.program.evaluate(values, readings.rows, {}, {}).values[name]
    assert isinstance(found, float)
    return found


def test_templates_without_a_job() -> None:
    """A template that runs alone can be studied too."""
    book_, _ = Runner().run(Filling(TEMPLATES / "wind-pressure.ipynb"))
    found = studies.sensitivity(book_, "q_h")
    assert slope(found, "V") == pytest.approx(
        2 * found.result.si / book_.readings.values["V"], rel=EXACT
    )


def test_speed_for_a_base_shear(demo: Callable[..., Workbook]) -> None:
    """V_max goes with V^2: for 1.21 of it the speed is 1.1 of what it was; nothing is written."""
    wind = demo("wind-pressure")
    before, base = wind.statement(), wind.results.values["V_max"]
    assert isinstance(base, float)
    found = studies.needed(wind, "V_max", "V", f"{1.21 * base!r} N")
    (answer,) = found.answers
    assert answer.text == "277.2 km/h"
    assert (answer.way, found.verdict) == ("bracketed", "one")
    assert wind.statement() == before


def test_carried_number_is_changed_at_its_home(demo: Callable[..., Workbook]) -> None:
    """For a number brought forward it is said where it is changed; K_h is solved for h."""
    found = studies.needed(demo("wind-pressure"), "K_h", "h", "1.2")
    assert found.notes == ("it is brought forward from design-basis.h_m, and changed there",)
    (answer,) = found.answers
    assert answer.way == "closed form"
    # K_h = 2.01 (h/z_g)^(2/alpha), exposure C (ASCE 7-16 Table 26.10-1)
    assert answer.si == pytest.approx(274.32 * (1.2 / 2.01) ** (9.5 / 2), rel=1e-9)


@pytest.mark.parametrize(
    ("name", "mark", "results"),
    [
        ("design-basis", None, ("A_plan", "h_m", "r_r")),
        ("dead-load-take-off", None, ("W_total", "W_seismic", "k_r")),
        ("wind-pressure", None, ("V_max", "q_h")),
        ("column-accumulation", "C-3", ("N_u", "A_T")),
    ],
)
def test_the_way_back(
    demo: Callable[..., Workbook], name: str, mark: str | None, results: tuple[str, ...]
) -> None:
    """The result an entry of 4 % more gives needs just that entry, among the answers."""
    workbook = demo(name, mark)
    for result in results:
        for one in studies.entries(workbook, result):
            text = _more(workbook, one.name)
            line = next(r for r in studies.results(workbook) if r.id == result)
            if not text:
                continue
            wanted = recomputed(workbook, one.name, text, line.name)
            target = f"{wanted / unit(line.unit).factor!r} {line.unit}".strip()
            found = studies.needed(workbook, result, one.name, target)
            assert found.answers, (result, one.name, found)
            for answer in found.answers:
                again = recomputed(workbook, one.name, answer.text, line.name)
                assert again == pytest.approx(wanted, rel=2 * MET)
            if len(found.answers) == 1 and not found.answers[0].stretch:
                assert found.answers[0].si == pytest.approx(read_quantity(text).si, rel=1e-6)


def _more(workbook: Workbook, name: str) -> str:
    """Return 4 % more of an entry as text in SI, or '' where that is refused or nothing."""
    value = workbook.readings.values[name]
    assert isinstance(value, float)
    quantity = workbook.readings.quantities.get(name)
    item = workbook.input_item(name)
    kind = getattr(item, "kind", None)
    shown = quantity.unit if quantity is not None else kind.si if kind is not None else unit("")
    text = f"{1.04 * value / shown.factor!r} {shown.text}".strip()
    try:
        workbook.accept(name, text)
    except InputError:
        return ""
    return text if value else ""


def test_checks_of_the_workbooks(demo: Callable[..., Workbook]) -> None:
    """Checks with a ratio are brought to their limit from every entry they come from."""
    for name in ("design-basis", "wind-pressure", "column-schedule"):
        workbook = demo(name)
        for one in studies.results(workbook):
            if one.which != "ratio":
                continue
            for entry in studies.entries(workbook, one.id):
                found = studies.needed(workbook, one.id, entry.name)
                assert found.verdict in {"one", "several", "none", "every"}
                assert bool(found.answers) == (found.verdict != "none")
                for answer in found.answers:
                    assert float(answer.result) == pytest.approx(1.0, abs=0.005), (one.id, answer)
