"""The door for tunes: the MIDI reader."""

from layout.errors import MidiReadError
from layout.read import read_score
from service.demo.compose import demo_tune
from tests.fuzz.door import Door
from tests.fuzz.mutated_tunes import mutated_tune
from tests.layout.read.hexdump import chunk, from_hexdump, midi_file, riff

_END = "00 FF 2F 00"
_NOTES = f"00 FF 51 03 07A120 00 90 3C 40 60 3C 00 00 99 24 40 8360 E0 00 40 00 C0 0A 00 80 3C 40 {_END}"
_METRE = f"00 FF 03 04 54756E65 00 FF 58 04 06 03 24 08 00 FF 59 02 FF 00 00 F0 03 01 02 F7 00 F7 01 00 {_END}"

SEEDS = (
    midi_file(_NOTES),
    midi_file(_METRE, _NOTES, midi_format=1),
    midi_file(_NOTES, _NOTES, midi_format=2),
    midi_file(_NOTES, division=0xE728),
    riff(chunk(b"data", midi_file(_NOTES), byteorder="little")),
    midi_file(from_hexdump("00 90 3C 40") + from_hexdump("00 3C 40 01 3C 00") * 50 + from_hexdump(_END)),
    demo_tune(),
)

DOOR = Door(name="tune", suffix=".mid", seeds=SEEDS, answer=read_score, mutate=mutated_tune, errors=(MidiReadError,))
