"""Public-domain pieces as MIDI files, for tests that want real music."""

import warnings
from functools import cache
from typing import NamedTuple

from music21 import converter, corpus
from music21.midi.translate import streamToMidiFile


class Piece(NamedTuple):
    """A piece of the corpus that the music21 library ships, and why it is in the public domain."""

    name: str
    work: str
    origin: str


_PRINTED_IN_1883 = "traditional, in a collection printed in 1883 (from memory)"

# Every composer died before 1925, or the tune is traditional and was printed before 1900.
_PIECES = (
    Piece("bach chorale 66.6", "bach/bwv66.6", "J. S. Bach, died 1750"),
    Piece("bach chorale 269", "bach/bwv269", "J. S. Bach, died 1750"),
    Piece("bach prelude and fugue 846", "bach/bwv846", "J. S. Bach, died 1750"),
    Piece("corelli grave", "corelli/opus3no1/1grave", "A. Corelli, died 1713"),
    Piece("cpe bach 186", "cpebach/h186", "C. P. E. Bach, died 1788"),
    Piece("mozart sonata exposition", "mozart/k545/movement1_exposition", "W. A. Mozart, died 1791"),
    Piece("schubert lindenbaum", "schubert/Lindenbaum", "F. Schubert, died 1828"),
    Piece("schumann song", "schumann_robert/opus48no2", "R. Schumann, died 1856"),
    Piece("foster song", "leadSheet/fosterBrownHair", "S. Foster, died 1864"),
    Piece("verdi canzone", "verdi/laDonnaEMobile", "G. Verdi, died 1901"),
    Piece("joplin rag", "joplin/maple_leaf_rag", "S. Joplin, died 1917"),
    Piece("liliuokalani song", "liliuokalani/aloha_oe", "Queen Liliuokalani, died 1917"),
    Piece("acacia reel", "ryansMammoth/AcaciaReel", _PRINTED_IN_1883),
    Piece("acrobats hornpipe", "ryansMammoth/AcrobatsHornpipe", _PRINTED_IN_1883),
)

# More of the same for what is quick to do on every piece; those above are the ones for slow tests.
_MORE_PIECES = (
    Piece("bach chorale 1.6", "bach/bwv1.6", "J. S. Bach, died 1750"),
    Piece("bach chorale 5.7", "bach/bwv5.7", "J. S. Bach, died 1750"),
    Piece("bach chorale 17.7", "bach/bwv17.7", "J. S. Bach, died 1750"),
    Piece("bach chorale 40.8", "bach/bwv40.8", "J. S. Bach, died 1750"),
    Piece("bach chorale 140.7", "bach/bwv140.7", "J. S. Bach, died 1750"),
    Piece("handel sarabande", "handel/rinaldo/Lascia_chio_pianga", "G. F. Handel, died 1759"),
    Piece("haydn presto", "haydn/opus1no1/movement1", "J. Haydn, died 1809"),
    Piece("haydn finale", "haydn/opus1no1/movement5", "J. Haydn, died 1809"),
    Piece("mozart quartet finale", "mozart/k155/movement3", "W. A. Mozart, died 1791"),
    Piece("wieck polonaise 1", "schumann_clara/polonaise_op1n1", "Clara Wieck (later Schumann), died 1896"),
    Piece("wieck polonaise 2", "schumann_clara/polonaise_op1n2", "Clara Wieck (later Schumann), died 1896"),
    Piece("wieck polonaise 3", "schumann_clara/polonaise_op1n3", "Clara Wieck (later Schumann), died 1896"),
    Piece("wieck polonaise 4", "schumann_clara/polonaise_op1n4", "Clara Wieck (later Schumann), died 1896"),
    Piece("swallow tail jig", "ryansMammoth/SwallowTailJig", _PRINTED_IN_1883),
    Piece("belle of the ball hornpipe", "ryansMammoth/BelleOfTheBallHornpipe", _PRINTED_IN_1883),
    Piece("sleepy maggie reel", "ryansMammoth/SleepyMaggieReel", _PRINTED_IN_1883),
    Piece("highland regiment strathspey", "ryansMammoth/42dHighlandRegimentStrathspey", _PRINTED_IN_1883),
    Piece("forest flower fling", "ryansMammoth/ForestFlowerHighlandFling", _PRINTED_IN_1883),
    Piece("liverpool hornpipe", "ryansMammoth/LiverpoolHornpipe", _PRINTED_IN_1883),
    Piece("amateur hornpipe", "ryansMammoth/AmateurHornpipe", _PRINTED_IN_1883),
)

PIECE_NAMES = tuple(piece.name for piece in _PIECES)
ALL_PIECE_NAMES = tuple(piece.name for piece in (*_PIECES, *_MORE_PIECES))


@cache
def public_domain_piece(name: str) -> bytes:
    """A piece of 20 s to 220 s by its name, of ALL_PIECE_NAMES, as a format 1 MIDI file written by music21.

    The compositions are in the public domain: every composer died before 1925, or the tune is
    traditional and was printed before 1900 (who and when stands beside each in this module). The
    encodings are those the installed library ships; none is kept here.

    The bytes are the same on every call and in every process. A second to seven, once a process.
    """
    [work] = [piece.work for piece in (*_PIECES, *_MORE_PIECES) if piece.name == name]
    return _midi_bytes(work)


def _midi_bytes(work: str) -> bytes:
    """A work of the corpus as a MIDI file.

    music21's remarks about odd notation in its own corpus are nothing to the tests that use the
    pieces, so its warnings are kept quiet here, and here only.
    """
    with warnings.catch_warnings():
        warnings.simplefilter("ignore")
        # Not from the library's own cache of pickles, nor into it: nothing outside the process is touched.
        stream = converter.parse(corpus.getWork(work), forceSource=True, storePickle=False)
        written = streamToMidiFile(stream).writestr()
    assert isinstance(written, bytes)
    return written
