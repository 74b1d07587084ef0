"""Every page in both colour schemes, wide and on a phone: no violation of access rules, no sideways scrolling."""

from collections.abc import Callable
from importlib.resources import files
from pathlib import Path
from typing import Any

import pytest

from service.app import create_app
from service.pages.page_views import is_page
from tests.browser.conftest import SCHEMES, SIZES, Window
from tests.browser.pages_list import NO_PAGES, PAGES, ShownPage
from tests.service.conftest import parts_of

# axe-core (MPL 2.0), as the Python package carries it; its rules of WCAG 2.0 to 2.2, A and AA, contrast among them.
AXE = files("axe_playwright_python").joinpath("axe.min.js").read_text(encoding="utf-8")
RULES = ["wcag2a", "wcag2aa", "wcag21a", "wcag21aa", "wcag22aa"]
GRAVE = ("serious", "critical")
ASK_AXE = """rules => axe.run(document, {
  runOnly: rules, resultTypes: ["violations"], rules: {"color-contrast": {enabled: false}}
})"""
ASK_CONTRAST = """([alike, most]) => {
  if (alike) [...document.querySelectorAll(alike)].slice(most).forEach((one) => one.remove());
  return axe.run(document, {runOnly: {type: "rule", values: ["color-contrast"]}, resultTypes: ["violations"]});
}"""
MOST_ALIKE = 6  # of parts made from one template; contrast takes a millisecond for each element
SHORTEST_PX = 320  # of CSS; WCAG 2.2, 1.4.10: at this width nothing scrolls sideways

every_page = pytest.mark.parametrize("shown", PAGES, ids=lambda page: page.name)


def told(violations: list[dict[str, Any]]) -> list[str]:
    return [
        f"{one['id']} ({one['impact']}): {node['target']} {node['failureSummary']}"
        for one in violations
        for node in one["nodes"]
    ]


def test_every_route_that_gives_a_page_is_in_the_list(tmp_path: Path) -> None:
    parts = parts_of(tmp_path)
    app = create_app(parts.settings)
    parts.store.close()

    routes = {rule.rule for rule in app.url_map.iter_rules() if is_page(app.view_functions[rule.endpoint])}

    assert routes - NO_PAGES == {shown.route for shown in PAGES} - {""}


@every_page
@pytest.mark.parametrize("scheme", SCHEMES)
def test_a_page_breaks_no_rule_of_access_gravely_and_can_be_read_in_its_colours(
    open_window: Callable[..., Window], shown: ShownPage, scheme: str, pictures: Path
) -> None:
    page = open_window(scheme=scheme, signed_in=shown.signed_in).show(shown)

    page.screenshot(path=pictures / f"{shown.name}-wide-{scheme}.png", full_page=True)
    page.evaluate(AXE)
    found = page.evaluate(ASK_AXE, RULES)["violations"]
    found += page.evaluate(ASK_CONTRAST, [shown.alike, MOST_ALIKE])["violations"]

    assert told([one for one in found if one["impact"] in GRAVE]) == []


@every_page
@pytest.mark.parametrize("scheme", SCHEMES)
def test_a_page_on_a_phone_never_scrolls_sideways(
    open_window: Callable[..., Window], shown: ShownPage, scheme: str, pictures: Path
) -> None:
    page = open_window(size="phone", scheme=scheme, signed_in=shown.signed_in).show(shown)

    page.screenshot(path=pictures / f"{shown.name}-phone-{scheme}.png", full_page=True)
    for width in (SIZES["phone"][0], SHORTEST_PX):
        page.set_viewport_size({"width": width, "height": 740})
        assert page.evaluate("document.documentElement.scrollWidth") <= width
