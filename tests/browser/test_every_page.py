"""Every page in both colour schemes, wide and on a phone: no violation of access rules, no sideways scrolling."""

from collections.abc import Callable
from pathlib import Path

import pytest
from playwright.sync_api import Page

from service.app import create_app
from service.pages.page_views import is_page
from tests.browser.access import contrast_faults_of, faults_of
from tests.browser.conftest import SCHEMES, SHORTEST_PX, SIZES, Window
from tests.browser.doing import unfold, widest
from tests.browser.pages_list import NO_PAGES, PAGES, ShownPage
from tests.service.conftest import parts_of

every_page = pytest.mark.parametrize("shown", PAGES, ids=lambda page: page.name)


def test_every_route_that_gives_a_page_is_in_the_list(tmp_path: Path) -> None:
    parts = parts_of(tmp_path)
    app = create_app(parts.settings)
    parts.store.close()

    routes = {rule.rule for rule in app.url_map.iter_rules() if is_page(app.view_functions[rule.endpoint])}

    assert routes - NO_PAGES == {shown.route for shown in PAGES} - {""}


@every_page
def test_a_page_breaks_no_rule_of_access_gravely_and_can_be_read_in_its_colours(
    open_window: Callable[..., Window], shown: ShownPage, take_pictures: Callable[[Page, str], None]
) -> None:
    page = open_window(signed_in=shown.signed_in).show(shown)
    take_pictures(page, f"{shown.name}-wide")

    unfold(page)
    found = faults_of(page)
    for scheme in SCHEMES:
        page.emulate_media(color_scheme=scheme)
        found += [f"{scheme}: {fault}" for fault in contrast_faults_of(page, shown.alike)]

    assert found == []


@every_page
def test_a_page_on_a_phone_never_scrolls_sideways_whatever_is_unfolded(
    open_window: Callable[..., Window], shown: ShownPage, take_pictures: Callable[[Page, str], None]
) -> None:
    page = open_window(size="phone", signed_in=shown.signed_in).show(shown)
    take_pictures(page, f"{shown.name}-phone")

    for fold in ("folded", "unfolded"):
        for width in (SIZES["phone"][0], SHORTEST_PX):
            page.set_viewport_size({"width": width, "height": 740})
            assert page.evaluate("document.documentElement.scrollWidth") <= width, f"{fold}: {widest(page)}"
        if unfold(page) == 0:
            break
