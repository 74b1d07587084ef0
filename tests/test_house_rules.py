"""The rules of the house that no linter knows: imports between stages, sizes, units in names, places."""

import ast
import re
import subprocess
import tomllib
from collections.abc import Iterator
from graphlib import TopologicalSorter
from pathlib import Path

import grimp
import pytest
from packaging.requirements import Requirement
from packaging.utils import canonicalize_name

TOP = Path(__file__).parent.parent
# A migration is one long list of steps, made from the tables: its length says nothing.
MODULES = sorted(
    path for path in [*TOP.glob("layout/**/*.py"), *TOP.glob("service/**/*.py")] if path.parent.name != "versions"
)

# The stages in the order of the walk, each with the module of its type, which later stages may import.
TYPE_MODULES = {
    "read": "layout.read.score",
    "arrange": "layout.arrange.arrangement",
    "place": "layout.place.disc",
    "play": "layout.play.plucks",
    "hear": "layout.hear.hearing",
    "check": "layout.check.finding",
    "report": "layout.report.report",
    "cut": "layout.cut.plan",
    "making": "layout.making.making",
    "trial": "layout.trial.piece",
    "sheets": "layout.sheets.plan",
    "write": None,
    "read_back": "layout.read_back.reading",
}
# Reading back must not lean on what was asked for or planned, only on what a disc is.
READ_BACK_MAY_IMPORT = {"layout.place.disc", "layout.play.plucks", "layout.check.finding"}
OPEN_TO_EVERY_STAGE = ("layout.documents", "layout.mechanics", "layout.errors", "layout.limits", "layout.version")
# What composes stages: the walk of a disc, two short ones that begin with documents alone, one from disc to sound.
THE_WALKS = {"layout.walk", "layout.sheet_walk", "layout.trial_walk", "layout.hearing_walk"}

MOST_MODULE_LINES = 400
MOST_FUNCTION_LINES = 50

UNIT_SUFFIXES = (
    *("_mm", "_mm2", "_deg", "_rad", "_s", "_ms", "_hz", "_n", "_nmm", "_n_per_mm", "_rad_per_s", "_kg", "_kg_m2"),
    *("_semitones", "_cents", "_factor", "_ratio", "_count"),
)
# Class.field: why it carries no unit.
FIELDS_WITHOUT_UNIT = {
    "Shape.bulges": "a DXF bulge is a plain number, tan of a quarter of the arc's angle",
    "Outlines.bulges": "as in Shape",
    "Hearing.turning_table": "its rows are moments and angles",
    "Row.coefficients": "a row of a program joins columns of any unit",
    "Row.least": "as coefficients",
    "Row.most": "as coefficients",
    **dict.fromkeys(("Over.low", "Over.high", "_Lengths.low", "_Lengths.high"), "mm along a ray, radians along a ring"),
    **dict.fromkeys(("_Spans.from_to", "_Spans.begins", "_Spans.longest"), "in the unit of the strips: radians or mm"),
    **dict.fromkeys(("Within.ge", "Within.gt", "Within.le", "Within.lt"), "in the unit of the number they bound"),
}

PINNED = ("requirements.txt", "requirements-many.txt", "requirements-tests.txt")  # each holds the one before
MACHINE_PATH = re.compile(r"(?<![\w.])/(?:home|Users|root|work|tmp)/\w|[A-Z]:\\Users|\.\./" + "shared")
TOP_LEVEL = {"README.md", "DEVELOPERS.md", "pyproject.toml", "layout", "service", "tests", "docker"}


def module_name(path: Path) -> str:
    parts = path.relative_to(TOP).with_suffix("").parts
    return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)


def imports_of(path: Path) -> Iterator[str]:
    """Every module of ours that a file imports; a name taken from a package counts as the package."""
    for node in ast.walk(ast.parse(path.read_text())):
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}: line {node.lineno}: imports are absolute in this house"
            for alias in node.names:
                inner = TOP.joinpath(*str(node.module).split("."), alias.name)
                is_module = inner.is_dir() or inner.with_suffix(".py").is_file()
                yield f"{node.module}.{alias.name}" if is_module else str(node.module)


def lies_in(module: str, package: str) -> bool:
    return module == package or module.startswith(package + ".")


def types_before(stage: str) -> set[str]:
    if stage == "read_back":
        return READ_BACK_MAY_IMPORT
    stages = list(TYPE_MODULES)
    return {name for before in stages[: stages.index(stage)] if (name := TYPE_MODULES[before])}


def functions_of(path: Path) -> Iterator[ast.FunctionDef | ast.AsyncFunctionDef]:
    for node in ast.walk(ast.parse(path.read_text())):
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef):
            yield node


def lines_without_docstring(function: ast.FunctionDef | ast.AsyncFunctionDef) -> int:
    lines = int(function.end_lineno or 0) - function.lineno + 1
    first = function.body[0]
    if isinstance(first, ast.Expr) and ast.get_docstring(function) is not None:
        lines -= int(first.end_lineno or 0) - first.lineno + 1
    return lines


def float_fields_of_dataclasses(path: Path) -> Iterator[tuple[str, str]]:
    """(class, field) of the float fields of every dataclass, but for those whose unit stands in a field `unit`."""
    for node in ast.walk(ast.parse(path.read_text())):
        if isinstance(node, ast.ClassDef) and any("dataclass" in ast.unparse(d) for d in node.decorator_list):
            fields = {
                ast.unparse(f.target): ast.unparse(f.annotation) for f in node.body if isinstance(f, ast.AnnAssign)
            }
            for name, annotation in fields.items():
                if "unit" not in fields and re.search(r"\bfloat\b|FloatArray", annotation):
                    yield node.name, name


def tracked_files() -> list[str]:
    try:
        listing = subprocess.run(["git", "ls-files", "-z"], cwd=TOP, capture_output=True, check=True)
    except (OSError, subprocess.CalledProcessError):
        pytest.skip("only a git clone knows which files belong to the project")
    return listing.stdout.decode().rstrip("\0").split("\0")


def pins(file_name: str) -> dict[str, str]:
    text = (TOP / "docker" / file_name).read_text()
    return dict(re.findall(r"^([\w.-]+)==(\S+)", text, flags=re.MULTILINE))


def test_a_stage_imports_only_what_stands_before_it() -> None:
    strangers = [
        f"{module_name(path)} imports {imported}"
        for stage in TYPE_MODULES
        for path in TOP.glob(f"layout/{stage}/**/*.py")
        for imported in imports_of(path)
        if lies_in(imported, "layout")
        and not any(lies_in(imported, package) for package in (*OPEN_TO_EVERY_STAGE, f"layout.{stage}"))
        and imported not in types_before(stage)
    ]

    assert strangers == []


def test_only_the_walk_calls_the_stages() -> None:
    types = set(TYPE_MODULES.values())
    callers = [
        f"{module_name(path)} imports {imported}"
        for path in MODULES
        if not any(lies_in(module_name(path), f"layout.{stage}") for stage in TYPE_MODULES)
        and module_name(path) not in THE_WALKS
        for imported in imports_of(path)
        if any(lies_in(imported, f"layout.{stage}") for stage in TYPE_MODULES) and imported not in types
    ]

    assert callers == []


def test_no_module_imports_itself_through_others() -> None:
    graph = grimp.build_graph("layout", "service", cache_dir=None)

    order = TopologicalSorter({name: graph.find_modules_directly_imported_by(name) for name in graph.modules})

    order.prepare()  # raises CycleError, which names the modules of the circle


@pytest.mark.parametrize("path", MODULES, ids=module_name)
def test_a_module_is_short_enough_to_read(path: Path) -> None:
    assert len(path.read_text().splitlines()) <= MOST_MODULE_LINES


@pytest.mark.parametrize("path", MODULES, ids=module_name)
def test_a_function_is_short_enough_to_read(path: Path) -> None:
    sizes = {function.name: lines_without_docstring(function) for function in functions_of(path)}

    assert {name: size for name, size in sizes.items() if size > MOST_FUNCTION_LINES} == {}


def test_a_float_field_says_its_unit() -> None:
    fields = [found for path in TOP.glob("layout/**/*.py") for found in float_fields_of_dataclasses(path)]

    unnamed = {f"{owner}.{field}" for owner, field in fields if not field.endswith(UNIT_SUFFIXES)}

    assert len(fields) > 0
    assert unnamed == set(FIELDS_WITHOUT_UNIT)


def test_the_top_level_holds_only_what_belongs_there() -> None:
    names = {name.partition("/")[0] for name in tracked_files()}

    assert {name for name in names if not name.startswith(".")} <= TOP_LEVEL


def test_no_file_names_a_place_of_one_machine() -> None:
    found = [
        f"{name}: {match.group()}"
        for name in tracked_files()
        if (TOP / name).is_file()
        for match in MACHINE_PATH.finditer((TOP / name).read_bytes().decode("latin-1"))
    ]

    assert found == []


@pytest.mark.parametrize("file_name", PINNED)
def test_pinned_requirements_name_no_index_and_no_place(file_name: str) -> None:
    text = (TOP / "docker" / file_name).read_text()

    assert re.findall(r"://|^\s*-(?!-hash)\S+|--index\S*|--find-links", text, flags=re.MULTILINE) == []
    assert len(pins(file_name)) > 0


def test_the_tests_run_with_the_versions_that_run_the_service() -> None:
    one, many, tests = (pins(file_name).items() for file_name in PINNED)

    assert one <= many <= tests


def test_every_dependency_of_the_project_is_pinned_to_a_version_it_allows() -> None:
    project = tomllib.loads((TOP / "pyproject.toml").read_text())
    runs = project["project"]["dependencies"] + project["dependency-groups"]["build"]
    many = project["project"]["optional-dependencies"]["many"]
    tests = project["dependency-groups"]["tests"]

    for file_name, wanted in zip(PINNED, (runs, runs + many, runs + many + tests), strict=True):
        pinned = pins(file_name)
        for requirement in map(Requirement, wanted):
            assert requirement.specifier.contains(pinned[canonicalize_name(requirement.name)]), requirement.name
