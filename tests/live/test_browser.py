"""The page of a workbook in a real JupyterLab: typing, refusals, stepping, keys, what is drawn."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

import pytest
from pages import SOON, SPEED, result, row, settled, typed, wait_for_text

if TYPE_CHECKING:
    from calcbook.job import Job

pytestmark = pytest.mark.browser
NAMELESS = """
() => [...document.querySelectorAll('.cb-view, .cb-bar')].flatMap((part) =>
  [...part.querySelectorAll('input, select, button, summary, a')].filter((one) =>
    !one.hidden && one.offsetParent !== null && !(one.getAttribute('aria-label') || one.title
      || one.textContent.trim() || one.labels?.[0]?.textContent.trim()))
    .map((one) => one.outerHTML))
"""
CONTRAST = """
() => {
  const parse = (text) => (text.match(/[\\d.]+/g) || []).map(Number);
  const light = ([r, g, b]) => [r, g, b].map((v) => v / 255)
    .map((v) => (v <= 0.03928 ? v / 12.92 : ((v + 0.055) / 1.055) ** 2.4))
    .reduce((sum, v, n) => sum + v * [0.2126, 0.7152, 0.0722][n], 0);
  const ground = (node) => {
    for (let at = node; at; at = at.parentElement) {
      const found = parse(getComputedStyle(at).backgroundColor);
      if (found.length === 3 || found[3] > 0.99) return found;
    }
    return [255, 255, 255];
  };
  const kinds = ['.cb-words', '.cb-margin div', '.cb-no', '.cb-result', '.cb-held', '.cb-says',
    '.cb-beside', '.cb-typed', 'input[type=text]', 'select', '.cb-confirm', '.cb-source', 'th',
    'td', '.cb-quiet', '.cb-refused', '.cb-title', '.cb-act', 'summary', '.cb-count'];
  const poor = [];
  for (const kind of kinds) {
    for (const node of document.querySelectorAll(`.cb-view ${kind}, .cb-bar ${kind}`)) {
      if (!node.textContent.trim() && !node.value) continue;
      const [a, b] = [light(parse(getComputedStyle(node).color)), light(ground(node))];
      const ratio = (Math.max(a, b) + 0.05) / (Math.min(a, b) + 0.05);
      if (ratio < 4.5 && !node.disabled) { poor.push(`${kind} ${ratio.toFixed(2)}`); break; }
    }
  }
  return poor;
}
"""


def test_a_value_typed_changes_the_page_and_the_record(wind_page: Any, lab_job: Job) -> None:
    """252 km/h changes no result; 80 m/s changes the line; both are in the record, confirmed."""
    before = result(wind_page, "q_h")
    assert "kPa" in before
    typed(wind_page, SPEED, "252 km/h")
    wait_for_text(wind_page, "[data-id='V'] .cb-field", "= 70 m/s")
    assert result(wind_page, "q_h") == before
    record = lab_job.record_path("wind-pressure")
    settled(record, "252 km/h", wind_page)
    typed(wind_page, SPEED, "80 m/s")
    wind_page.wait_for_function(
        "before => !document.querySelector(\"[data-id='q_h']\").textContent.includes(before)",
        arg=before, timeout=SOON,
    )  # fmt: skip
    settled(record, "80 m/s", wind_page)
    entry = lab_job.record("wind-pressure").entries["V"]
    assert (entry.value, entry.confirmed and entry.confirmed.by) == ("80 m/s", "RA")


def test_a_refused_value_says_why_and_changes_nothing(wind_page: Any, lab_job: Job) -> None:
    """1,5 m gives a reason beside the field; the record and the line keep the last good value."""
    typed(wind_page, SPEED, "80 m/s")
    kept = result(wind_page, "q_h")
    typed(wind_page, SPEED, "1,5 m")
    told = row(wind_page, "V").locator(".cb-refused")
    told.wait_for(timeout=SOON)
    assert told.get_attribute("role") == "alert"
    assert "Not taken:" in told.inner_text()
    assert "80 m/s stays in force" in told.inner_text()
    field = wind_page.locator(SPEED).first
    assert field.input_value() == "1,5 m"
    assert field.get_attribute("aria-invalid") == "true"
    typed(wind_page, SPEED, "500 m/s")
    wait_for_text(wind_page, "[data-id='V'] .cb-refused", "120 m/s")  # the range
    assert result(wind_page, "q_h") == kept
    assert lab_job.record("wind-pressure").entries["V"].value == "80 m/s"
    field.press("Escape")
    told.wait_for(state="hidden", timeout=SOON)
    assert field.input_value().startswith("80")


def test_arrow_keys_step_without_confirming(wind_page: Any, lab_job: Job) -> None:
    """Up changes the last digit and the page follows; the value is then to be confirmed."""
    typed(wind_page, SPEED, "70 m/s")
    settled(lab_job.record_path("wind-pressure"), '"70 m/s"', wind_page)
    field = wind_page.locator(SPEED).first
    before = result(wind_page, "q_h")
    field.press("ArrowUp")
    wait_for_text(wind_page, "[data-id='V'] .cb-confirm", "not confirmed")
    assert field.input_value().startswith("71")
    assert result(wind_page, "q_h") != before
    field.press("Shift+ArrowDown")
    wind_page.wait_for_function(
        "field => document.querySelector(field).value.startsWith('61')", arg=SPEED, timeout=SOON
    )
    settled(lab_job.record_path("wind-pressure"), '"61', wind_page)
    assert lab_job.record("wind-pressure").entries["V"].confirmed is None
    field.press("Enter")
    wait_for_text(wind_page, "[data-id='V'] .cb-confirm", "confirmed RA")


def test_a_mark_confirms_and_a_source_is_typed(wind_page: Any, lab_job: Job) -> None:
    """Ticking confirms, taking the tick back does not; the source is edited in its place."""
    box = row(wind_page, "V").locator("input[type=checkbox]")
    box.press("Enter")
    wait_for_text(wind_page, "[data-id='V'] .cb-confirm", "not confirmed")
    box.press(" ")
    wait_for_text(wind_page, "[data-id='V'] .cb-confirm", "confirmed RA")
    row(wind_page, "V").locator("button.cb-source").press("Enter")
    field = row(wind_page, "V").locator("input.cb-source-field")
    field.fill("map of the wind zones")
    field.press("Enter")
    wait_for_text(wind_page, "[data-id='V'] .cb-source", "map of the wind zones")
    settled(lab_job.record_path("wind-pressure"), "map of the wind zones", wind_page)


def test_a_choice_changes_what_applies(wind_page: Any) -> None:
    """Another exposure changes the coefficient; the first is chosen again."""
    before = result(wind_page, "K_h")
    select = row(wind_page, "exposure").locator("select")
    chosen = select.input_value()
    select.select_option("B" if chosen != "B" else "C")
    wind_page.wait_for_function(
        "before => !document.querySelector(\"[data-id='K_h'] .cb-result\").textContent"
        ".includes(before)", arg=before, timeout=SOON,
    )  # fmt: skip
    select.select_option(chosen)
    wait_for_text(wind_page, "[data-id='K_h'] .cb-result", before)


def test_only_what_changed_is_drawn_again(wind_page: Any) -> None:
    """A line that does not depend on the change keeps its element, and the field its caret."""
    wind_page.evaluate(
        "() => { for (const name of ['K_h', 'q_h'])"
        " document.querySelector(`[data-id='${name}'] math`).dataset.old = 'yes'; }"
    )
    kept = result(wind_page, "q_h")
    typed(wind_page, SPEED, "66 m/s")
    wind_page.wait_for_function(
        "before => !document.querySelector(\"[data-id='q_h']\").textContent.includes(before)",
        arg=kept, timeout=SOON,
    )  # fmt: skip
    old = "name => !!document.querySelector(`[data-id='${name}'] math[data-old]`)"
    assert [wind_page.evaluate(old, name) for name in ("K_h", "q_h")] == [True, False]
    assert wind_page.evaluate("() => document.activeElement.title") == "Basic wind speed"


def test_formulas_are_set_in_the_bundled_typeface(wind_page: Any) -> None:
    """The math font came with the page, and nothing was fetched from elsewhere."""
    assert wind_page.evaluate("() => document.fonts.check('16px \"STIX Two Math\"')")
    faces = "() => [...document.fonts].filter(f => f.family.includes('STIX')).map(f => f.status)"
    assert wind_page.evaluate(faces) == ["loaded"]
    hosts = "() => performance.getEntriesByType('resource').map(r => new URL(r.name).hostname)"
    assert set(wind_page.evaluate(hosts)) <= {"127.0.0.1", ""}


def test_tab_goes_from_field_to_field(wind_page: Any) -> None:
    """With the keyboard alone one comes from an entry to what follows it, and types."""
    wind_page.locator(SPEED).first.focus()
    seen = []
    for _ in range(6):
        wind_page.keyboard.press("Tab")
        seen.append(wind_page.evaluate(
            "() => document.activeElement.closest('[data-id]')?.dataset.id ?? ''"
        ))  # fmt: skip
    assert "exposure" in seen


def test_everything_to_act_on_has_a_name(wind_page: Any) -> None:
    """Every field, button and link has words that a screen reader says."""
    assert wind_page.evaluate(NAMELESS) == []


@pytest.mark.parametrize("width", [900, 1600])
@pytest.mark.parametrize("theme", ["Dark", "Light"])
def test_the_page_fits_in_both_themes(wind_page: Any, width: int, theme: str) -> None:
    """No section is wider than its cell, and text stands out from its ground by 4.5 to 1."""
    wind_page.set_viewport_size({"width": width, "height": 1100})
    wind_page.click("li.lm-MenuBar-item >> text=Settings")
    wind_page.hover("text=Theme")
    wind_page.click(f"text=JupyterLab {theme}")
    chosen = f"body[data-jp-theme-name='JupyterLab {theme}']"
    wind_page.wait_for_selector(chosen, state="attached", timeout=SOON)
    wind_page.wait_for_timeout(400)
    wide = wind_page.evaluate(
        "() => [...document.querySelectorAll('.cb-view')]"
        ".filter(v => v.scrollWidth > v.clientWidth + 1).map(v => v.dataset.section)"
    )
    assert wide == []
    assert wind_page.evaluate(CONTRAST) == []
