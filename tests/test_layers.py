"""The arrows between the rooms of the package, and what each room may touch; no exemptions."""

from __future__ import annotations

import ast
from collections.abc import Iterator, Mapping
from pathlib import Path

import pytest

import gatecheck

PACKAGE = Path(gatecheck.__file__).parent
NOTHING: frozenset[str] = frozenset()
BELOW_THE_GATE = frozenset({
    "beyond",
    "columns",
    "compare",
    "errors",
    "evidence",
    "facts",
    "figures",
    "freshness",
    "git",
    "globs",
    "history",
    "interval_figures",
    "model",
    "notes",
    "permissions",
    "plans",
    "policies",
    "policy",
    "pull_request",
    "rules",
    "scan",
    "schema",
    "starting",
    "weigh",
})
#: What each room may import of the package; a room that is not here is a failure.
ARROWS: Mapping[str, frozenset[str]] = {
    "model": NOTHING,
    "globs": NOTHING,
    "errors": NOTHING,
    "weigh": NOTHING,
    "schema": frozenset({"model"}),
    "git_process": frozenset({"errors"}),
    "fetching": frozenset({"git_process"}),
    "git": frozenset({"errors", "fetching", "git_process"}),
    "starting": frozenset({"errors", "git"}),
    "scan": frozenset({"model", "schema", "git", "globs", "errors"}),
    "policy": frozenset({"model", "schema", "globs"}),
    "columns": frozenset({"model"}),
    "default_priors": frozenset({"columns", "weigh", "model"}),
    "standard_errors": frozenset({"columns", "weigh"}),
    "together": frozenset({"columns", "standard_errors", "weigh", "policy", "model"}),
    "evidence": frozenset({"columns", "default_priors", "together", "weigh", "policy", "model"}),
    "compare": frozenset({"columns", "evidence", "standard_errors", "together", "weigh", "model"}),
    "rules": frozenset({
        "columns",
        "default_priors",
        "standard_errors",
        "evidence",
        "compare",
        "weigh",
        "policy",
        "prose",
        "model",
        "schema",
    }),
    "interval_figures": frozenset({"model"}),
    "displaying": frozenset({
        "columns",
        "compare",
        "errors",
        "evidence",
        "figures",
        "git",
        "globs",
        "model",
        "policies",
        "policy",
        "render",
        "rules",
        "schema",
    }),
    "prose": frozenset({"model", "git", "globs", "scan"}),
    "analysis": frozenset({"model", "git", "globs", "scan", "errors"}),
    "beyond": frozenset({"analysis", "facts", "prose", "rules", "policy", "model"}),
    "facts": frozenset({"analysis", "compare", "freshness", "history", "plans", "policy", "rules", "model"}),
    "notes": frozenset({"figures", "pull_request", "rules", "model"}),
    "figures": frozenset({"rules", "weigh", "policy", "model"}),
    "design_tests": frozenset({"columns", "weigh", "errors", "model"}),
    "design": frozenset({"columns", "design_tests", "weigh", "policy", "errors", "model"}),
    "policies": frozenset({"scan", "rules", "policy", "schema", "git", "errors", "model"}),
    "render": frozenset({"model"}),
    "history": frozenset({"fetching", "git", "scan", "schema", "model", "globs", "errors"}),
    "rerunning": frozenset({"scan", "schema", "git", "model", "globs", "errors"}),
    "plans": frozenset({"fetching", "history", "git", "scan", "schema", "model", "globs", "errors"}),
    "freshness": frozenset({"compare", "history", "scan", "git", "model"}),
    "permissions": frozenset({"errors", "fetching", "git", "history", "model", "plans", "rules", "scan", "schema"}),
    "two_verdicts": frozenset({"schema", "model"}),
    "pull_request": frozenset({"rules", "model"}),
    "declaring": frozenset({"model", "schema"}),
    "gate": BELOW_THE_GATE,
    "commands": frozenset({
        "arguments",
        "gate",
        "design",
        "errors",
        "model",
        "permissions",
        "plans",
        "policies",
        "policy",
        "prose",
        "render",
        "rerunning",
        "rules",
        "scan",
        "schema",
        "starting",
        "tracing",
        "two_verdicts",
    }),
    "tracing": frozenset({
        "columns",
        "compare",
        "evidence",
        "errors",
        "git",
        "history",
        "model",
        "plans",
        "policy",
        "rules",
        "scan",
        "weigh",
    }),
    "arguments": NOTHING,
    "cli": frozenset({"arguments", "commands", "errors", "model"}),
    "__main__": frozenset({"cli"}),
    # What analysis code imports from the root of the package.
    "__init__": frozenset({"declaring"}),
}
#: The only rooms that may import the arrays; all others hold plain values.
WITH_ARRAYS = {
    "weigh",
    "columns",
    "evidence",
    "compare",
    "rules",
    "figures",
    "design",
    "design_tests",
    "default_priors",
    "standard_errors",
    "together",
    "declaring",
}
OPENING = {"open", "read_bytes", "read_text", "write_bytes", "write_text"}
#: The modules that open files, and what they open them for.
MAY_OPEN = (
    "scan/",  # the judged files
    "cli.py",  # the null device for a reader that has gone
    "analysis/catalogue.py",  # the tests that libraries have
    "commands/refresh.py",  # the prose whose linked numbers it writes
    "compare/wordings.py",  # the lists of phrases
    "commands/edge.py",  # the reports
    "declaring/",  # the record of a result
    "schema/__init__.py",  # the published schemas
    "permissions/accepted.py",
    "rerunning/",  # the copy of the tree, which is removed at once
    "render/page/",  # the style and the program of the page
    "plans/seal.py",  # the seal of a plan
    "plans/signatures.py",  # the allowed signers, in a folder that is removed at once
    "starting/",  # the first policy and the example
)


def _modules() -> dict[str, ast.Module]:
    paths = sorted(PACKAGE.rglob("*.py"))
    return {path.relative_to(PACKAGE).as_posix(): ast.parse(path.read_bytes()) for path in paths}


MODULES = _modules()


def _room(module: str) -> str:
    return module.split("/", maxsplit=1)[0].removesuffix(".py")


def _imported(tree: ast.Module) -> Iterator[str]:
    """Every module that is imported anywhere in `tree`, also inside functions and for type checking."""
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            yield from (alias.name for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, "imports are absolute"
            yield from (f"{node.module}.{alias.name}" for alias in node.names)


def _rooms_imported(tree: ast.Module) -> set[str]:
    rooms = {_room(module) for module in MODULES}
    named = {name.split(".")[1] for name in _imported(tree) if name.startswith("gatecheck.")}
    return named & rooms


def _outside_imported(tree: ast.Module) -> set[str]:
    return {name.split(".")[0] for name in _imported(tree)} - {"gatecheck", "__future__"}


def _called(tree: ast.Module) -> set[str]:
    calls = [node.func for node in ast.walk(tree) if isinstance(node, ast.Call)]
    names = {call.id for call in calls if isinstance(call, ast.Name)}
    return names | {call.attr for call in calls if isinstance(call, ast.Attribute)}


def _names(tree: ast.Module) -> set[str]:
    attributes = {node.attr for node in ast.walk(tree) if isinstance(node, ast.Attribute)}
    return attributes | {node.id for node in ast.walk(tree) if isinstance(node, ast.Name)}


@pytest.mark.parametrize("module", MODULES)
def test_arrows(module: str) -> None:
    room = _room(module)

    assert _rooms_imported(MODULES[module]) - {room} <= ARROWS[room]


def test_every_room_has_its_arrows() -> None:
    assert {_room(module) for module in MODULES} == set(ARROWS)


def test_the_arrows_go_one_way() -> None:
    """Rooms can be put in an order in which each imports earlier ones alone."""
    placed: set[str] = set()
    while left := {room for room in ARROWS if room not in placed}:
        ready = {room for room in left if ARROWS[room] <= placed}
        assert ready, f"a circle among {sorted(left)}"
        placed |= ready

    assert placed == set(ARROWS)


def test_the_reading_of_modules_sees_what_is_there() -> None:
    """Arrows that are not seen would never be wrong."""
    assert _rooms_imported(MODULES["gate.py"]) >= {"scan", "columns", "evidence", "compare", "rules", "policies"}
    assert {"numpy", "scipy"} <= _outside_imported(MODULES["weigh/chi_laplace.py"])
    assert "write_bytes" in _called(MODULES["commands/edge.py"])


def test_the_mathematics_needs_numpy_and_special_functions_alone() -> None:
    for module, tree in MODULES.items():
        if _room(module) == "weigh":
            scipy = {name for name in _imported(tree) if name.split(".")[0] == "scipy"}
            assert all(name.startswith("scipy.special") for name in scipy), module


def test_arrays_stay_among_the_rooms_that_compute() -> None:
    assert {_room(name) for name, tree in MODULES.items() if "numpy" in _outside_imported(tree)} <= WITH_ARRAYS
    assert {_room(name) for name, tree in MODULES.items() if "scipy" in _outside_imported(tree)} <= WITH_ARRAYS


def test_telling_needs_the_standard_library_alone() -> None:
    for module, tree in MODULES.items():
        if _room(module) in {"model", "render"}:
            assert _outside_imported(tree).isdisjoint({"numpy", "scipy", "yaml", "nbconvert"}), module


def test_one_module_runs_git() -> None:
    """A record also says from which commit it was made, and the room that writes records imports no other.

    Analysis code runs in one room, which `weigh` does not load.
    """
    running = {module for module, tree in MODULES.items() if "subprocess" in _outside_imported(tree)}

    assert running - {"declaring/provenance.py", "rerunning/running.py"} == {"git_process.py"}
    running |= {module for module, tree in MODULES.items() if _called(tree) & {"system", "popen", "Popen"}}
    assert running - {"declaring/provenance.py", "rerunning/running.py"} == {"git_process.py"}


def test_files_are_opened_at_the_edge() -> None:
    opening = {module for module, tree in MODULES.items() if _called(tree) & OPENING}

    assert {module for module in opening if not module.startswith(MAY_OPEN)} == set()
    assert {"commands/edge.py", "cli.py", "scan/tree.py", "starting/__init__.py"} <= opening


def test_nothing_prints() -> None:
    """The command writes to the streams in one place, which also settles their encoding."""
    assert {module for module, tree in MODULES.items() if "print" in _names(tree)} == set()


def test_the_environment_is_read_at_the_edge() -> None:
    reading = {module for module, tree in MODULES.items() if _names(tree) & {"environ", "getenv", "environb"}}

    # A notebook's own path stands nowhere else than in the environment.
    assert reading - {"declaring/provenance.py", "rerunning/running.py"} <= {
        "cli.py",
        "commands/edge.py",
        "git_process.py",
    }


def test_nothing_runs_what_it_reads() -> None:
    """A record is data: nothing in the package turns text into code."""
    running = {"eval", "exec", "compile", "__import__", "pickle", "marshal", "unsafe_load", "full_load"}

    calls = {module: _called(tree) & running for module, tree in MODULES.items()}
    patterns = {module for module, found in calls.items() if found == {"compile"}}
    assert {module: found for module, found in calls.items() if found and module not in patterns} == {}
    for module in patterns:
        assert "re" in _outside_imported(MODULES[module]), module
        assert not any(isinstance(node, ast.Name) and node.id == "compile" for node in ast.walk(MODULES[module]))
