import io
import json
import os
from pathlib import Path
from typing import Any

import pytest
import symusic

from layout.documents import shipped_movement
from layout.documents.shipped import shipped_text
from service.commands.main import main
from service.demo.compose import demo_tune
from tests.layout.hear.sounds import read_wav


@pytest.fixture
def tune(tmp_path: Path) -> Path:
    path = tmp_path / "dance.mid"
    path.write_bytes(demo_tune())
    return path


def read_midi(path: Path) -> Any:
    return symusic.Score(path, ttype="second")


def hear(tune: Path, out: Path, *more: object, movement: str = "fernhollow-31") -> int:
    return main([str(word) for word in ("hear", tune, "--movement", movement, "--out", out, *more)])


def test_a_disc_is_written_as_sound_and_told(tune: Path, capsys: pytest.CaptureFixture[str]) -> None:
    out = tune.parent / "new" / "dance.wav"

    code = hear(tune, out)

    told = capsys.readouterr().out
    samples = read_wav(io.BytesIO(out.read_bytes()))
    assert code == 0
    assert len(samples) > 66 * 48_000  # a turn takes 66 s
    assert abs(samples).max() == pytest.approx(10 ** (-1 / 20), abs=2e-5)
    assert "Turning Day at Wickenbeck, as the disc plays it" in told
    assert "assumed     how long 31 teeth ring, since the movement states no tooth_quality" in told
    assert f"written to {out}" in told


def test_a_disc_with_an_error_is_heard_all_the_same(tune: Path, capsys: pytest.CaptureFixture[str]) -> None:
    code = hear(tune, tune.parent / "dance.mid.mid", movement="tarnlight-17")

    assert code == 3
    assert "NOT GOOD TO CUT; `discwright plan` says why" in capsys.readouterr().out
    assert (tune.parent / "dance.mid.mid").exists()


def test_the_tune_as_written_has_more_to_hear_than_the_disc(tune: Path, capsys: pytest.CaptureFixture[str]) -> None:
    told = []
    for of in ("disc", "written"):
        hear(tune, tune.parent / f"{of}.mid", "--of", of, "--json", movement="tarnlight-17")
        told.append(json.loads(capsys.readouterr().out))

    counts = [read_midi(tune.parent / f"{of}.mid").note_num() for of in ("disc", "written")]

    assert [one["of"] for one in told] == ["disc", "written"]
    assert counts == [one["plucks_heard"] for one in told]
    assert counts[0] < counts[1]


def test_24_bits_are_written_where_asked_for(tune: Path) -> None:
    assert hear(tune, tune.parent / "a.wav", "--bits", "24") == 0

    assert (tune.parent / "a.wav").read_bytes()[34:36] == (24).to_bytes(2, "little")


@pytest.mark.parametrize(
    ("out", "more", "message"),
    [
        ("a.mp3", (), "a.mp3' ends in neither .wav nor .mid; name a file that does"),
        ("a.mid", ("--bits", "24"), "--bits belongs to .wav, and --out is"),
        ("a.wav", ("--bits", "20"), "argument --bits: invalid choice"),
        ("a.wav", ("--disc", "2"), "--disc is 2; the settings ask for 1"),
        ("a.wav", ("--turn", "last"), "/drive/winding: the last turn of a winding is asked for"),
        ("a.wav", ("--settings", "nowhere.json"), "settings 'nowhere.json' cannot be read"),
    ],
)
def test_what_cannot_be_done_is_told_in_one_line_and_nothing_is_written(
    tune: Path, capsys: pytest.CaptureFixture[str], out: str, more: tuple[str, ...], message: str
) -> None:
    code = hear(tune, tune.parent / out, *more)

    told = capsys.readouterr()
    assert (code, told.out, told.err.count("\n")) == (2, "", 1)
    assert message in told.err
    assert [path.name for path in tune.parent.iterdir()] == ["dance.mid"]


def test_a_sound_that_cannot_be_finished_leaves_the_earlier_one(
    tune: Path, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    out = tune.parent / "dance.wav"
    out.write_bytes(b"an earlier sound")

    def full(*_: object) -> None:
        raise OSError(28, "No space left on device")

    monkeypatch.setattr(os, "replace", full)
    code = hear(tune, out)

    assert code == 2
    assert "dance.wav': No space left on device" in capsys.readouterr().err
    assert out.read_bytes() == b"an earlier sound"
    assert sorted(path.name for path in tune.parent.iterdir()) == ["dance.mid", "dance.wav"]


def test_a_folder_is_no_file_for_a_sound(tune: Path, capsys: pytest.CaptureFixture[str]) -> None:
    (tune.parent / "a.wav").mkdir()

    assert hear(tune, tune.parent / "a.wav") == 2
    assert "a.wav' is a folder; --out names a file" in capsys.readouterr().err


def test_the_first_and_the_last_turn_of_a_stated_winding_differ_in_length(tune: Path) -> None:
    movement = shipped_movement("mossbrook-67")
    assert movement.drive is not None
    (tune.parent / "mine.json").write_text(movement.model_dump_json(exclude_none=True))
    lengths = {}
    for turn in ("first", "last"):
        out = tune.parent / f"{turn}.mid"
        words = ("hear", tune, "--movement", tune.parent / "mine.json", "--turn", turn, "--out", out)
        assert main([str(word) for word in words]) == 0
        lengths[turn] = read_midi(out).end()

    assert lengths["first"] < lengths["last"]


def test_where_a_movement_states_how_long_its_teeth_ring_nothing_is_assumed(
    tune: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    movement = tune.parent / "movement.json"
    stated = {**json.loads(shipped_text("fernhollow-31")), "tooth_quality": 400}
    movement.write_text(json.dumps(stated))

    assert hear(tune, tune.parent / "dance.mid.mid", movement=str(movement)) == 0

    assert "assumed" not in capsys.readouterr().out
