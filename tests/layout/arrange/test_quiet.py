import subprocess
import sys

PROGRAM = """
from layout.arrange import arrange
from layout.documents import Settings, shipped_movement
from layout.read import read_score
from service.demo.compose import demo_tune
from tests.layout.arrange.small_comb import spacing_for

movement = shipped_movement("mossbrook-67")
settings = Settings(octave_moves="outer")
arrangement = arrange(read_score(demo_tune()), movement, settings, spacing_for(movement))
raise SystemExit(0 if len(arrangement.planned_s) > 100 else 3)
"""


def test_arranging_the_demo_tune_writes_nothing_anywhere() -> None:
    # In a process of its own: what a library writes past Python's own streams is seen there too.
    ended = subprocess.run([sys.executable, "-c", PROGRAM], capture_output=True, check=False, timeout=120)

    assert (ended.returncode, ended.stdout, ended.stderr) == (0, b"", b"")
