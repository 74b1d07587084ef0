"""/measuring: how a restorer measures each value of a movement on a real one."""

from dataclasses import dataclass

from flask import Blueprint, Response, request

from service.api.asking import open_to_all
from service.pages.machines_told import field_words, unit_of
from service.pages.page_views import gives_page
from service.pages.rendering import page
from service.pages.texts import text_of

# The sections, each with the places of a movement document whose values it tells how to measure: JSON pointers
# without the numbers of lists. The longest beginning of a value's place decides.
SECTIONS: dict[str, tuple[str, ...]] = {
    "turning": ("/turns", "/revolution_s", "/fastest_revolution_s"),
    "music": ("/before_music_deg", "/after_music_deg"),
    "row": ("/gantry_offset_mm",),
    "disc": ("/disc",),
    "features": ("/disc/features",),
    "keep_out": ("/keep_out",),
    "tracks": ("/tracks",),
    "wheel": ("/star_wheel", "/tracks/engagement_arc_mm", "/tracks/release_arc_mm"),
    "projection": ("/projection",),
    "damper": ("/damper_arc_mm", "/damper_recovery_s", "/teeth/damped"),
    "comb": ("/teeth",),
    "bending": ("/teeth/stiffness_n_per_mm", "/teeth/lift_mm"),
    "sound": ("/tooth_quality", "/teeth/quality", "/teeth/end_mass_ratio"),
    "drive": ("/drive",),
    "spring": ("/drive/winding",),
}
SAID = ("what", "tool", "often", "state")


@dataclass(frozen=True, slots=True, kw_only=True)
class Section:
    """A section of the page.

    Attributes:
        name: Its anchor.
        title: Its heading.
        said: What to do, each part with its name: what to measure, with what, how often, what to state.
        care: What to be careful of; "" for no more than what stands at the head of the page.
        fields: The fields it is for: name in words with unit, and place in the document.
    """

    name: str
    title: str
    said: tuple[tuple[str, str], ...]
    care: str
    fields: tuple[tuple[str, str], ...]


def measuring_routes() -> Blueprint:
    """The page that tells how to measure."""
    routes = Blueprint("measuring_pages", __name__)

    @routes.get("/measuring")
    @gives_page
    @open_to_all
    def show_measuring() -> Response:
        return page(request, "measuring.html", sections=sections())

    return routes


def section_of(place: str) -> str | None:
    """The section that tells how to measure what lies at a place of a movement document; None for none.

    Args:
        place: A JSON pointer without the numbers of lists, such as "/teeth/cents".
    """
    found = [
        (len(begin), name)
        for name, begins in SECTIONS.items()
        for begin in begins
        if place == begin or place.startswith(f"{begin}/")
    ]
    return max(found)[1] if found else None


def sections() -> tuple[Section, ...]:
    """The sections in the order in which a movement is best measured."""
    return tuple(_section(name, places) for name, places in SECTIONS.items())


def _section(name: str, places: tuple[str, ...]) -> Section:
    return Section(
        name=name,
        title=text_of(f"measuring.{name}_title"),
        said=tuple((text_of(f"measuring.{part}"), text_of(f"measuring.{name}_{part}")) for part in SAID),
        care=text_of(f"measuring.{name}_care"),
        fields=tuple((_named(place.rsplit("/", 1)[1]), place) for place in places),
    )


def _named(field: str) -> str:
    unit = unit_of(field)
    return f"{field_words(field)}, {unit}" if unit else field_words(field)
