"""Pictures of discs made by hand, and how tests look at them."""

import io
from xml.etree import ElementTree

from PIL import Image

from layout.check.finding import Finding
from layout.place.disc import Disc
from layout.write import write_svg
from tests.layout.write.examples import (
    laid_out_of,
    plan_by_hand,
)

SVG = "{http://www.w3.org/2000/svg}"


def svg_of(
    disc: Disc, *, title: str = "Example", findings: tuple[Finding, ...] = (), not_good: str | None = None
) -> bytes:
    plan = plan_by_hand(disc, title=title, not_good=not_good)
    return write_svg(plan, laid_out_of(disc, title=title, findings=findings))


def texts_of(svg: bytes) -> list[str]:
    return [str(element.text) for element in ElementTree.fromstring(svg).iter(f"{SVG}text")]


def group_of(svg: bytes, name: str) -> ElementTree.Element:
    [group] = [group for group in ElementTree.fromstring(svg).iter(f"{SVG}g") if group.get("id") == name]
    return group


def on_white(png: bytes) -> Image.Image:
    """The picture as it looks on paper: a last row of pixels that it fills in part only shows the paper."""
    drawn = Image.open(io.BytesIO(png)).convert("RGBA")
    return Image.alpha_composite(Image.new("RGBA", drawn.size, "white"), drawn)
