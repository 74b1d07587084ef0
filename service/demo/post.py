"""Posts the demo tune to a running service, once for each movement it ships, and keeps what comes back.

A trial piece for the first movement and sheets of discs for all come after.

Run as `python -m service.demo.post --address http://127.0.0.1:8000 --out demo`. It knows the service only by
what it promises over HTTP, as any other client would.
"""

import argparse
import hashlib
import json
import sys
from collections import Counter
from collections.abc import Callable, Iterable
from dataclasses import dataclass
from importlib import resources
from io import BytesIO
from pathlib import Path
from typing import Any

import mido

from service.demo.asking import DemoFailedError, Upload, fetch
from service.demo.workshop import post_sheets, post_trial_piece

CUTTING_FILES = ("disc.dxf", "hits.csv", "press.nc")  # what the service keeps back while an error stands
SOUNDS = ("hearing.wav", "hearing.mid")  # heard where they are: they need not lie beside what is cut
OUTSIDE = "outside-passage"  # the reason of notes the demo did not ask for
INTERRUPTED = 130  # common practice: 128 + the number of SIGINT


@dataclass(frozen=True, slots=True, kw_only=True)
class Tune:
    """A MIDI file and the moments of its first and last onset, from the start of the file."""

    midi: bytes
    first_onset_s: float
    last_onset_s: float

    @property
    def lasts_s(self) -> float:
        """Seconds a turn must offer to play all of it: from the first onset to the last."""
        return self.last_onset_s - self.first_onset_s


def read_tune(midi: bytes) -> Tune:
    """The tune with the moments of its onsets.

    Raises:
        DemoFailedError: The file holds no note.
    """
    onsets_s = []
    moment_s = 0.0
    for message in mido.MidiFile(file=BytesIO(midi)):
        moment_s += message.time
        if message.type == "note_on" and message.velocity > 0:
            onsets_s.append(moment_s)
    if not onsets_s:
        raise DemoFailedError("the demo tune holds no note")
    return Tune(midi=midi, first_onset_s=onsets_s[0], last_onset_s=onsets_s[-1])


def free_part_s(movement: dict[str, Any]) -> float:
    """Seconds of music that one turn of a movement offers, its rest sector left out."""
    free_deg = 360 - movement["before_music_deg"] - movement["after_music_deg"]
    return float(movement["revolution_s"] * free_deg / 360)


def whole_tune(tune: Tune) -> Upload:
    """The MIDI file as it is."""
    return Upload(body=tune.midi, media_type="audio/midi")


def passage_of(tune: Tune, to_s: float) -> Upload:
    """The MIDI file with settings that take its first `to_s` seconds, as multipart form-data (RFC 7578)."""
    settings = {"format": "discwright-settings/1", "passage": {"from_s": 0, "to_s": to_s}}
    boundary = hashlib.sha256(tune.midi).hexdigest()
    lines = [
        f"--{boundary}".encode(),
        b'Content-Disposition: form-data; name="tune"; filename="tune.mid"',
        b"Content-Type: audio/midi",
        b"",
        tune.midi,
        f"--{boundary}".encode(),
        b'Content-Disposition: form-data; name="settings"; filename="settings.json"',
        b"Content-Type: application/json",
        b"",
        json.dumps(settings).encode(),
        f"--{boundary}--".encode(),
        b"",
    ]
    return Upload(body=b"\r\n".join(lines), media_type=f"multipart/form-data; boundary={boundary}")


def report(layout: dict[str, Any]) -> list[str]:
    """Lines that say what a disc keeps of the tune, what it leaves out and why, and what was found."""
    kept = sum(len(projection["notes"]) for projection in layout["projections"])
    left_out = [note for note in layout["left_out"] if note["reason"] != OUTSIDE]
    outside = len(layout["left_out"]) - len(left_out)
    of_what = f"the {kept + len(left_out)} notes of the passage" if outside else f"{kept + len(left_out)} notes"
    found = layout["findings"]
    moved = f"moved by {layout['transposed_semitones']:+g} semitones"
    lines = [f"kept {kept} of {of_what}, {moved}"]
    if left_out:
        lines.append(f"left out {len(left_out)}: {_tally(note['reason'] for note in left_out)}")
    if outside:
        lines.append(f"outside the passage: {outside} notes")
    errors = [finding for finding in found if finding["level"] == "error"]
    lines.append("NOT GOOD TO CUT" if errors else "good to cut")
    lines += [f"error {finding['code']}: {finding['message']}" for finding in errors]
    if len(found) > len(errors):
        lines.append(f"to look at: {_tally(f['code'] for f in found if f['level'] != 'error')}")
    return lines


def _tally(words: Iterable[str]) -> str:
    return ", ".join(f"{count} {word}" for word, count in sorted(Counter(words).items()))


def make_disc(address: str, movement_id: str, tune: Tune, say: Callable[[str], None]) -> dict[str, bytes]:
    """The files of one disc, by name; everything is fetched before anything is kept.

    Raises:
        DemoFailedError: The service refuses the tune or one of the files.
    """
    movement = json.loads(fetch(f"{address}/v1/movements/{movement_id}"))
    say(f"{movement_id}: {movement['title']}")
    upload = whole_tune(tune)
    free_s = free_part_s(movement)
    if tune.lasts_s > free_s:
        say(f"  the tune lasts {tune.lasts_s:.1f} s, one turn plays {free_s:.1f} s: that much of it is taken")
        upload = passage_of(tune, free_s)
    made = json.loads(fetch(f"{address}/v1/layouts?movement={movement_id}", upload))
    for line in report(made["layout"]):
        say(f"  {line}")
    return {name: fetch(address + path) for name, path in made["links"].items() if name not in SOUNDS}


def keep(files: dict[str, bytes], folder: Path) -> None:
    """Write the files into a folder, made where it does not exist; files of other names stay.

    Cutting files of an earlier demo go: kept back now, they would be cut for another disc.
    """
    folder.mkdir(parents=True, exist_ok=True)
    for name in CUTTING_FILES:
        (folder / name).unlink(missing_ok=True)
    for name, content in files.items():
        (folder / Path(name).name).write_bytes(content)


def post_demo(address: str, out: Path, say: Callable[[str], None]) -> None:
    """Make the demo disc of every movement the service ships, a trial piece and a job of sheets; say what came of each.

    Args:
        address: Where the service answers, without a slash at the end.
        out: The folder that gets one folder per movement.
        say: Called with each line for the reader.

    Raises:
        DemoFailedError: The service refuses something, or ships no movement.
        OSError: A file cannot be written.
    """
    tune = read_tune(resources.files("service.demo").joinpath("tune.mid").read_bytes())
    movements = json.loads(fetch(f"{address}/v1/movements"))["movements"]
    if not movements:
        raise DemoFailedError(f"{address} ships no movement")
    for movement in movements:
        files = make_disc(address, movement["id"], tune, say)
        folder = out / movement["id"]
        keep(files, folder)
        say(f"  written to {folder}: {', '.join(files)}")
    documents = [json.loads(fetch(f"{address}/v1/movements/{movement['id']}")) for movement in movements]
    for folder, files in (
        (out / "trial-piece", post_trial_piece(address, documents[0]["id"], say)),
        (out / "sheets", post_sheets(address, documents, say)),
    ):
        keep(files, folder)
        say(f"  written to {folder}: {', '.join(files)}")


def _say(line: str) -> None:
    sys.stdout.write(f"{line}\n")
    sys.stdout.flush()


def main() -> None:
    """Read the command line, post the demo, exit with 1 and one line on stderr where it failed."""
    about = __doc__.partition("\n")[0]
    parser = argparse.ArgumentParser(prog="python -m service.demo.post", description=about)
    parser.add_argument("--address", default="http://127.0.0.1:8000", help="where the service answers")
    parser.add_argument("--out", type=Path, default=Path("demo"), help="the folder for the files")
    arguments = parser.parse_args()
    try:
        post_demo(arguments.address.rstrip("/"), arguments.out, _say)
    except (DemoFailedError, OSError) as failure:
        sys.exit(f"demo: {failure}")
    except (KeyError, TypeError, ValueError) as oddity:
        sys.exit(f"demo: the service at {arguments.address} answered something unexpected: {oddity!r}")
    except KeyboardInterrupt:
        sys.exit(INTERRUPTED)


if __name__ == "__main__":
    main()
