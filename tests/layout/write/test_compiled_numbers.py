"""The compiled way of writing a work sheet's numbers: the library's own, held against the same library's plain one."""

import importlib.util
import sys
from types import ModuleType

import pytest
from hypothesis import given
from hypothesis import strategies as st
from reportlab.lib import rl_accel


@pytest.fixture(scope="module")
def plain() -> ModuleType:
    """The library as it is where nothing compiled is there."""
    with pytest.MonkeyPatch.context() as patch:
        patch.setitem(sys.modules, "_rl_accel", None)
        spec = importlib.util.find_spec("reportlab.lib.rl_accel")
        assert spec is not None
        assert spec.loader is not None
        module = importlib.util.module_from_spec(spec)
        spec.loader.exec_module(module)
    return module


@given(numbers=st.lists(st.floats(-1e5, 1e5) | st.integers(-100_000, 100_000), min_size=1, max_size=6))
def test_compiled_numbers_are_those_of_the_plain_way(plain: ModuleType, numbers: list[float]) -> None:
    assert rl_accel.fp_str(*numbers) == plain.fp_str(*numbers)


def test_numbers_are_written_by_what_is_compiled(plain: ModuleType) -> None:
    assert type(rl_accel.fp_str).__name__ == "builtin_function_or_method"
    assert type(plain.fp_str).__name__ == "function"
