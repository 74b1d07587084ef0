"""What hearing gives: the sound of a disc as rings of voices, mixed into blocks of samples when they are asked for."""

from collections.abc import Iterator
from dataclasses import dataclass

from layout.hear.mixing import RATE_HZ, Mixer, Tone
from layout.hear.performance import Asked
from layout.mechanics.arrays import FloatArray

__all__ = ["RATE_HZ", "Hearing", "Ring", "Voice"]


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Voice:
    """The sound of one tooth let go: Σ level·e^(−t/decay)·sin(2π·frequency·t).

    Attributes:
        frequency_hz: Shape (n,). Of its partials, rising; none for a tooth nobody hears.
        decay_s: Shape (n,). In which each falls to 1/e.
        level_ratio: Shape (n,). How loud each is, to any common measure.
    """

    frequency_hz: FloatArray
    decay_s: FloatArray
    level_ratio: FloatArray


@dataclass(frozen=True, slots=True, kw_only=True)
class Ring:
    """One tooth, from its release until it is silenced. Moments count from when the disc begins to move.

    Attributes:
        voice: Its place in the hearing's voices.
        track: Whose projection plucked it, from 1; 0 for a tooth the comb lacks.
        key: The MIDI key it sounds.
        starts_s: The release.
        held_s: When damper or point take hold of it, or the sound is faded out at its end.
        fade_s: How long that takes; from held_s + fade_s on it is silent.
    """

    voice: int
    track: int
    key: int
    starts_s: float
    held_s: float
    fade_s: float


@dataclass(frozen=True, slots=True, kw_only=True, eq=False)
class Hearing:
    """A disc as it sounds. It holds no samples: they are made block by block, as often as they are asked for.

    Attributes:
        title: Of the tune.
        asked: How it is heard.
        voices: The teeth that sound.
        rings: What each sounds, in the order of their beginnings; none for a disc without projections.
        still_ratio: Partials below it are over; in the voices' common measure.
        length_s: From when the disc begins to move until all is silent, and at least until the turn is over.
        turning_table: Shape (k, 2). Moments in seconds, rising, and how far the disc has turned by then in radians;
            between them it may be taken to turn evenly.
    """

    title: str
    asked: Asked
    voices: tuple[Voice, ...]
    rings: tuple[Ring, ...]
    still_ratio: float
    length_s: float
    turning_table: FloatArray

    @property
    def sample_count(self) -> int:
        """How many samples the sound has, at RATE_HZ."""
        return round(self.length_s * RATE_HZ)

    def blocks(self) -> Iterator[FloatArray]:
        """The samples, block after block, in the voices' common measure. Each pass gives the very same."""
        tones = [Tone(voice.frequency_hz, voice.decay_s, voice.level_ratio, self.still_ratio) for voice in self.voices]
        mixer = Mixer(tones)
        begins = [round(ring.starts_s * RATE_HZ) for ring in self.rings]
        holds = [round(ring.held_s * RATE_HZ) for ring in self.rings]
        fades = [max(round(ring.fade_s * RATE_HZ), 1) for ring in self.rings]
        voices = [ring.voice for ring in self.rings]
        return mixer.blocks(list(zip(begins, holds, fades, voices, strict=True)), self.sample_count)
