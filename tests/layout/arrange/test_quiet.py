import subprocess
import sys

PROGRAM = """
from layout.arrange import arrange
from layout.documents import Settings, shipped_movement
from layout.read import read_score
from service.demo.compose import demo_tune
from tests.layout.arrange.small_comb import spacing_for
from tests.layout.arrange.test_searching import arranged_with

movement = shipped_movement("fernhollow-31")
settings = Settings(octave_moves="outer")
arrangement = arrange(read_score(demo_tune()), movement, settings, spacing_for(movement))
nudged = (arrangement.planned_s != arrangement.asked_s).any()  # by the linear program
coupled = arranged_with(None)  # webs and loads: by the integer program
raise SystemExit(0 if nudged and coupled.worth.proved else 3)
"""


def test_arranging_the_demo_tune_and_a_crowded_one_writes_nothing_anywhere() -> None:
    # In a process of its own: what a library writes past Python's own streams is seen there too.
    ended = subprocess.run([sys.executable, "-c", PROGRAM], capture_output=True, check=False, timeout=120)

    assert (ended.returncode, ended.stdout, ended.stderr) == (0, b"", b"")
