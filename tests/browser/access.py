"""What axe-core says of a page: its rules of WCAG 2.0 to 2.2, A and AA, contrast among them."""

from collections.abc import Sequence
from importlib.resources import files
from typing import Any

from playwright.sync_api import Page

AXE = files("axe_playwright_python").joinpath("axe.min.js").read_text(encoding="utf-8")  # MPL 2.0
RULES = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa"]
GRAVE = ("serious", "critical")
# What sticks to an edge lies over whatever is there just then, which scrolling uncovers: it is let go first.
ASK_AXE = """rules => {
  for (const one of document.querySelectorAll("body *")) {
    if (getComputedStyle(one).position === "sticky") one.style.position = "static";
  }
  return axe.run(document, {
    runOnly: rules, resultTypes: ["violations"], rules: {"color-contrast": {enabled: false}}
  });
}"""
ASK_CONTRAST = """([alike, most]) => {
  if (alike) [...document.querySelectorAll(alike)].slice(most).forEach((one) => one.remove());
  return axe.run(document, {runOnly: {type: "rule", values: ["color-contrast"]}, resultTypes: ["violations"]});
}"""
MOST_ALIKE = 6  # of parts made from one template; contrast takes a millisecond for each element


def told(violations: Sequence[dict[str, Any]]) -> list[str]:
    """Violations in words."""
    return [
        f"{one['id']} ({one['impact']}): {node['target']} {node['failureSummary']}"
        for one in violations
        for node in one["nodes"]
    ]


def grave(answer: Any) -> list[str]:
    """The grave violations of an answer of axe, in words."""
    return told([one for one in answer["violations"] if one["impact"] in GRAVE])


def faults_of(page: Page) -> list[str]:
    """The grave violations on a page as it stands, of all rules but contrast: no other depends on the colours."""
    page.evaluate(AXE)
    return grave(page.evaluate(ASK_AXE, RULES))


def contrast_faults_of(page: Page, alike: str = "") -> list[str]:
    """What cannot be read well in the colours the page has.

    Args:
        page: One that `faults_of` has looked at.
        alike: Parts made from one template: all but the first few are taken away first, since each element takes a
            millisecond.
    """
    return grave(page.evaluate(ASK_CONTRAST, [alike, MOST_ALIKE]))
