"""How a finding is told in JSON: the names that layout.json, the API and its readers share."""

from layout.check.finding import Code, Finding, Level, Place, finding_told


def finding_at(place: Place) -> Finding:
    return Finding(
        code=Code.WEB_TOO_THIN,
        level=Level.ERROR,
        message="Too thin.",
        measured=0.4,
        limit=0.5,
        unit="mm",
        at=place,
        remedy="Widen it.",
    )


def test_a_finding_is_told_under_its_own_names_with_all_that_applies_of_its_place() -> None:
    place = Place(tracks=(1, 2), projections=(0, 3), radius_mm=50.0, angle_deg=0.0, sounds_s=0.0)

    assert finding_told(finding_at(place)) == {
        "code": "web-too-thin",
        "level": "error",
        "message": "Too thin.",
        "measured": 0.4,
        "limit": 0.5,
        "unit": "mm",
        "at": {"tracks": [1, 2], "projections": [0, 3], "radius_mm": 50.0, "angle_deg": 0.0, "sounds_s": 0.0},
        "remedy": "Widen it.",
    }


def test_what_does_not_apply_to_a_place_is_not_told() -> None:
    assert finding_told(finding_at(Place()))["at"] == {}
