import pytest

from layout.documents.pitch import key_of, pitch_of


# ISO 16: A4 = 440 Hz; MIDI 1.0 gives it key 69 and middle C, C4, key 60. C3 and C8 follow by octaves of 12.
@pytest.mark.parametrize(
    ("pitch", "key"), [("A4", 69), ("C4", 60), ("C-1", 0), ("G9", 127), ("Bb3", 58), ("F#5", 78), ("C8", 108)]
)
def test_a_pitch_name_has_its_midi_key(pitch: str, key: int) -> None:
    assert key_of(pitch) == key


def test_every_key_keeps_its_name_both_ways() -> None:
    assert [key_of(pitch_of(key)) for key in range(128)] == list(range(128))


@pytest.mark.parametrize("name", ["H4", "c4", "C", "C##4", "4", "", "C10"])
def test_a_name_that_is_no_pitch_is_refused_with_examples(name: str) -> None:
    with pytest.raises(ValueError, match="is not a pitch name such as C4, F#5 or Bb3"):
        key_of(name)


@pytest.mark.parametrize("name", ["G#9", "Cb-1"])
def test_a_pitch_outside_the_keys_is_refused(name: str) -> None:
    with pytest.raises(ValueError, match=r"outside the MIDI keys 0 \(C-1\) to 127 \(G9\)"):
        key_of(name)
