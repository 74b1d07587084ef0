"""How a finding is told in JSON: the names that layout.json, the API and its readers share."""

from layout.check.finding import Code, Finding, Level, Place, finding_told

MESSAGE = "The web is 0.400 mm; 0.500 mm are needed."


def finding_at(place: Place) -> Finding:
    return Finding(
        code=Code.MARGIN_UNSURE,
        level=Level.WARNING,
        message=MESSAGE,
        measured=0.4,
        limit=0.5,
        unit="mm",
        at=place,
        remedy="Widen it.",
    )


def test_a_finding_is_told_under_its_own_names_with_all_that_applies_of_its_place() -> None:
    place = Place(tracks=(1, 2), projections=(0, 3), radius_mm=50.0, angle_deg=0.0, sounds_s=0.0)

    assert finding_told(finding_at(place)) == {
        "code": "margin-unsure",
        "level": "warning",
        "message": MESSAGE,
        "measured": 0.4,
        "limit": 0.5,
        "unit": "mm",
        "at": {"tracks": [1, 2], "projections": [0, 3], "radius_mm": 50.0, "angle_deg": 0.0, "sounds_s": 0.0},
        "remedy": "Widen it.",
    }


def test_what_does_not_apply_to_a_place_is_not_told() -> None:
    assert finding_told(finding_at(Place()))["at"] == {}
