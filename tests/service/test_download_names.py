from urllib.parse import unquote

import pytest

from layout.documents import shipped_cutter, shipped_movement
from service.download_names import NamedDisc, content_disposition, download_name, slug


def disc(title: str = "Harvest Dance", *, not_good: bool = False) -> NamedDisc:
    return NamedDisc(
        title=title,
        movement=shipped_movement("fernhollow-31"),
        cutter=shipped_cutter("fibre-laser"),
        fingerprint="ab12cd34ef560789",
        not_good=not_good,
    )


@pytest.mark.parametrize(
    ("file_name", "ending"),
    [
        ("disc.dxf", ".dxf"),
        ("record.dxf", "_record-not-for-cutting.dxf"),
        ("disc.svg", ".svg"),
        ("hits.csv", "_hits.csv"),
        ("layout.json", "_layout.json"),
        ("report.json", "_report.json"),
    ],
)
def test_a_name_tells_all_a_shop_must_know(file_name: str, ending: str) -> None:
    name = download_name(disc(), file_name)

    assert name == ("harvest-dance_fernhollow-31-r1_cold-rolled-steel-0.5mm_label-side_mm_ab12cd34ef560789" + ending)


def test_a_disc_not_good_to_cut_says_so_first() -> None:
    assert download_name(disc(not_good=True), "disc.dxf").startswith("NOT-GOOD-TO-CUT_harvest-dance_fernhollow")


@pytest.mark.parametrize(
    ("title", "expected"),
    [
        ("Harvest Dance", "harvest-dance"),
        ("Étude in F♯", "etude-in-f"),
        ('a/b\\c"d\r\ne;f', "a-b-c-d-e-f"),
        ("../../etc/passwd", "etc-passwd"),
        ("x" * 41, "x" * 40),
        ("月の光", ""),
        ("", ""),
    ],
)
def test_a_slug_is_plain_ascii(title: str, expected: str) -> None:
    assert slug(title, 40) == expected


def test_a_title_without_ascii_letters_keeps_its_own_in_the_second_name() -> None:
    field = content_disposition(disc("月の光"), "disc.dxf", how="attachment")

    plain, _, own = field.partition("; filename*=UTF-8''")
    assert plain.startswith('attachment; filename="untitled_fernhollow-31-r1_')
    assert unquote(own).startswith("月の光_fernhollow-31-r1_")
    assert own.isascii()


def test_an_ascii_title_needs_no_second_name() -> None:
    assert "filename*" not in content_disposition(disc(), "disc.dxf", how="attachment")


@pytest.mark.parametrize("title", ["é\r\nSet-Cookie: a=b", 'é"; x="', "é\u202egnp.exe", "é/../x", "\ud800é"])
def test_no_title_breaks_out_of_the_header(title: str) -> None:
    field = content_disposition(disc(title), "disc.dxf", how="attachment")

    own = unquote(field.partition("; filename*=UTF-8''")[2])
    assert field.isprintable()
    assert field.count('"') == 2
    assert not set('/\\"\r\n\u202e') & set(own)


def test_a_name_fits_what_file_systems_take() -> None:
    field = content_disposition(disc("光" * 80, not_good=True), "record.dxf", how="attachment")

    own = unquote(field.partition("; filename*=UTF-8''")[2])
    assert len(own.encode()) < 255
    assert own.startswith("NOT-GOOD-TO-CUT_" + "光" * 20 + "_")  # 60 bytes of three each
