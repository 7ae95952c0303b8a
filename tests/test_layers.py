"""Who may import whom: an independent check is only independent while its two routes stay strangers."""

from __future__ import annotations

import ast
import os
import subprocess
import sys
from collections.abc import Iterable, Mapping
from functools import cache
from graphlib import CycleError, TopologicalSorter
from pathlib import Path

PACKAGE = Path(__file__).parents[1] / "trusscalc"

# from the bottom up; a package stands for all its modules, which must be free of circles among themselves
LAYERS = (
    *(
        "errors",
        "convenience",
        "wholenumbers",
        "exact",
        "decimals",
        "roots",
        "exacttext",
        "units",
        "truss",
        "loads",
        "chains",
        "loadrules",
        "loadentries",
        "panelshares",
        "panelloads",
        "publishedcombinations",
        "combinationsums",
        "combinationtables",
        "trainvalues",
        "trains",
        "publishedtrains",
        "shapes",
        "project",
        "trussfile",
    ),
    *("filetext", "combinationfiles", "replacefile", "filetables", "filewriting", "files", "symbolparts", "samples"),
    *("statics.scaling", "statics.matrix", "statics.cuts"),
    *("statics.incidence", "statics.bodies", "statics.prices", "statics.derivations", "statics.bridges"),
    *("statics.carrying", "statics.plan", "statics.steps", "statics.owncuts", "statics.cutreport"),
    *(
        "statics.zeroforce",
        "stiffness",
        "flexibility",
        "frame",
        "verdicts",
        "numericruns",
        "membercheck",
        "influencetargets",
        "influence",
        "criticalpositions",
        "loadedline",
        "passage",
        "travel",
        "standing",
        "superposition",
        "envelopes",
        "governing",
        "influencechecks",
        "report",
        "loadreport",
        "submitted",
        "implied",
        "ourforces",
        "comparison",
        "compare",
        "fits",
        "slips",
        "ratios",
        "altered",
        "alterations",
        "mirrors",
        "screening",
        "fitting",
        "stiffjoints",
        "pairs",
        "explanations",
        "diagnosis",
        "blind",
        "comparereport",
        "sheet",
        "render",
        "verifying",
        "recheck",
        "widgets",
    ),
    *("display", "__init__", "comparecommand", "__main__"),
)
AT_CALL_TIME = {("exact", "exacttext"), ("exact", "decimals"), ("exact", "roots")}
"""Upward all the same, inside a function: how a number shows itself to people."""
MODEL = {"errors", "convenience", "wholenumbers", "exact", "decimals", "roots", "exacttext", "units", "truss", "loads"}
STIFFNESS_MAY_IMPORT = {"errors", "truss", "loads"}
RENDER_MAY_IMPORT = {"errors", "exact", "exacttext", "decimals", "units"}
SHEET_MAY_NAME = {"statics.matrix": {"Bar", "Equilibrium", "GROUND"}}
SOLVERS = {"stiffness", *(name for name in LAYERS if name.startswith("statics."))} - {"statics.cuts", "statics.steps"}
CONFINED = {
    "numpy": {"stiffness", "flexibility", "frame", "screening", "fitting", "stiffjoints", "pairs"},
    "matplotlib": {"render.draw"},
    "nbformat": {"render.notebook"},
    "typst": {"render.pdf"},
    "ipywidgets": {"widgets.form", "widgets.onscreen", "widgets.trainscreen", "widgets.workscreen"},
    "anywidget": {"widgets.views"},
    "traitlets": {"widgets.views"},
    "importlib": {"__init__", "convenience"},  # what is loaded by name is not seen here
}
HEAVY = {"matplotlib", "nbformat", "typst", "ipywidgets", "anywidget", "traitlets", "IPython"}
SHOWN_LATE = {f"widgets.{name}" for name in ("form", "onscreen", "screen", "trainscreen", "views", "workscreen")}
"""Modules that may import what is heavy at once, because others import them only when something is shown."""

Imports = list[tuple[str, str, bool]]
"""Module, name taken from it ('' for the module itself), and whether it is imported when first used."""


@cache
def imports_of(source: str) -> Imports:
    """Return every import of a module's text, those for types alone as if they were real."""
    found: Imports = []
    tree = ast.parse(source)
    late = {
        (inner.lineno, inner.col_offset)
        for node in ast.walk(tree)
        if isinstance(node, ast.FunctionDef | ast.AsyncFunctionDef) or _for_types_alone(node)
        for inner in ast.walk(node)
        if isinstance(inner, ast.Import | ast.ImportFrom)
    }
    for node in ast.walk(tree):
        if isinstance(node, ast.Import):
            found += [(alias.name, "", (node.lineno, node.col_offset) in late) for alias in node.names]
        elif isinstance(node, ast.ImportFrom):
            assert not node.level, f"line {node.lineno}: relative import"
            module = node.module or ""
            found += [(module, alias.name, (node.lineno, node.col_offset) in late) for alias in node.names]
    return found


def _for_types_alone(node: ast.AST) -> bool:
    return isinstance(node, ast.If) and isinstance(node.test, ast.Name) and node.test.id == "TYPE_CHECKING"


def read_package() -> dict[str, str]:
    """Return the text of every module by its name in the package; a package's own ``__init__`` by the package's."""
    texts = {}
    for path in sorted(PACKAGE.rglob("*.py")):
        name = ".".join(path.relative_to(PACKAGE).with_suffix("").parts)
        texts[name.removesuffix(".__init__")] = path.read_text(encoding="utf-8")
    return texts


def own_imports(texts: Mapping[str, str], module: str) -> dict[str, set[str]]:
    """Return the package's modules that a module imports, with the names taken."""
    found: dict[str, set[str]] = {}
    for imported, name, _ in imports_of(texts[module]):
        if imported.split(".")[0] != "trusscalc":
            continue
        inner = imported.removeprefix("trusscalc").lstrip(".")
        as_module = f"{inner}.{name}".lstrip(".")
        if as_module in texts:
            found.setdefault(as_module, set()).add("")
        elif name and not inner:
            found.setdefault("__init__", set()).add(name)
        else:
            found.setdefault(inner, set()).add(name)
    return found


def layer_of(module: str) -> int:
    """Return a module's place in the list (ValueError when it is in no layer)."""
    place = module if module in LAYERS else module.split(".", maxsplit=1)[0]
    if place == "statics" and module == "statics":
        place = "statics.matrix"
    return LAYERS.index(place)


def faults(texts: Mapping[str, str]) -> list[str]:
    """Return every import that breaks a rule, each with both module names."""
    wrong = []
    graph: dict[str, dict[str, set[str]]] = {}
    for module in texts:
        try:
            layer_of(module)
        except ValueError:
            wrong.append(f"{module} is in no layer: give it its place in LAYERS")
            continue
        graph[module] = own_imports(texts, module)
        for imported in [upper for lower, upper in AT_CALL_TIME if lower == module]:
            at_once = {name for name, _, late in imports_of(texts[module]) if not late}
            if f"trusscalc.{imported}" not in at_once:
                graph[module].pop(imported, None)
        for imported, names in graph[module].items():
            wrong += _breaks(module, imported, names)
        for imported, _, late in imports_of(texts[module]):
            outside = imported if imported.startswith("importlib.") else imported.split(".")[0]
            if module not in CONFINED.get(outside, {module}):
                wrong.append(f"{module} imports {outside}, which belongs to {', '.join(sorted(CONFINED[outside]))}")
            elif outside in HEAVY and not late and module not in SHOWN_LATE:
                wrong.append(f"{module} imports {outside} at once; import it inside the function that needs it")
            inner = imported.removeprefix("trusscalc.")
            if inner in SHOWN_LATE and not late and module not in SHOWN_LATE:
                wrong.append(f"{module} imports {inner} at once; import it inside the function that shows something")
    return wrong + _circles(graph) + _strangers(graph)


def _breaks(module: str, imported: str, names: set[str]) -> list[str]:
    try:
        above = layer_of(imported) > layer_of(module)
    except ValueError:
        return [f"{module} imports {imported}, which is in no layer"]
    package = module.split(".", maxsplit=1)[0]
    wrong = [f"{module} imports {imported}, which lies above it"] if above else []
    if module == "stiffness" and imported not in STIFFNESS_MAY_IMPORT:
        wrong.append(f"stiffness imports {imported}: the numeric route sees the model only")
    if package == "render" and imported.split(".", maxsplit=1)[0] not in RENDER_MAY_IMPORT | {"render", "sheet"}:
        wrong.append(f"{module} imports {imported}: rendering sees sheets and numbers, not statics")
    if package == "sheet" and imported in SOLVERS and names - SHEET_MAY_NAME.get(imported, set()):
        wrong.append(f"{module} imports {imported}: sheets see results, not solvers")
    return wrong


def _circles(graph: Mapping[str, Mapping[str, set[str]]]) -> list[str]:
    """Return a circle of imports among the modules of one package, if there is one."""
    try:
        list(TopologicalSorter({module: set(imported) for module, imported in graph.items()}).static_order())
    except CycleError as problem:
        return [f"imports in a circle: {' imports '.join(problem.args[1])}"]
    return []


def reached(graph: Mapping[str, Iterable[str]], start: str) -> set[str]:
    """Return every module a module imports, directly or through others."""
    found: set[str] = set()
    waiting = [start]
    while waiting:
        for imported in graph.get(waiting.pop(), ()):
            if imported not in found:
                found.add(imported)
                waiting.append(imported)
    return found


def _strangers(graph: Mapping[str, Mapping[str, set[str]]]) -> list[str]:
    """Return where the two routes meet in anything but the model."""
    numeric = reached(graph, "stiffness") | {"stiffness"}
    wrong = []
    for module in graph:
        if module.split(".")[0] == "statics":
            by_hand = reached(graph, module) | {module}
            wrong += [f"{module} reaches {shared}, and so does stiffness" for shared in by_hand & numeric - MODEL]
    return wrong


def test_every_import_goes_down_and_the_routes_stay_strangers() -> None:
    """The package as it is breaks no rule."""
    assert faults(read_package()) == []


def test_planted_imports_are_reported_with_both_names() -> None:
    """A checker never seen failing is not trusted: one bad import for every rule."""
    texts = read_package()

    def with_line(module: str, line: str) -> list[str]:
        return faults({**texts, module: f"{texts.get(module, '')}\n{line}\n"})

    planted = {
        ("exact", "from trusscalc.membercheck import MemberCheck"): "exact imports membercheck",
        ("statics.plan", "from trusscalc import stiffness"): "statics.plan imports stiffness",
        (
            "stiffness",
            "def late():\n    from trusscalc.statics.matrix import solve",
        ): "stiffness imports statics.matrix",
        ("stiffness", "from trusscalc.exact import Exact"): "stiffness imports exact",
        ("sheet.blocks", "from trusscalc.statics.plan import plan"): "sheet.blocks imports statics.plan",
        ("sheet.blocks", "from trusscalc.statics.matrix import solve"): "sheet.blocks imports statics.matrix",
        ("render.draw", "from trusscalc.truss import Truss"): "render.draw imports truss",
        ("truss", "def late():\n    import numpy"): "truss imports numpy",
        ("render.draw", "import matplotlib.figure"): "render.draw imports matplotlib at once",
        (
            "widgets.answers",
            "from trusscalc.widgets.screen import Screen",
        ): "widgets.answers imports widgets.screen at once",
        ("widgets.answers", "import ipywidgets"): "widgets.answers imports ipywidgets, which belongs to",
        ("statics.bridges", "from trusscalc.statics.plan import plan"): "statics.bridges imports statics.plan",
        ("statics.plan", "from importlib import import_module"): "statics.plan imports importlib",
        ("exact", "from trusscalc.exacttext import parse"): "exact imports exacttext",
        ("helpers", ""): "helpers is in no layer",
        ("loads", "from trusscalc.helpers import something"): "loads imports helpers, which is in no layer",
    }
    for (module, line), told in planted.items():
        assert any(fault.startswith(told) for fault in with_line(module, line)), (module, line)


def test_a_hidden_meeting_of_the_routes_is_reported() -> None:
    """Through a third module: arithmetic that both routes would share."""
    texts = {
        "statics.plan": "from trusscalc.files import read",
        "stiffness": "from trusscalc.truss import Truss",
        "truss": "from trusscalc.files import read",
        "files": "",
    }
    assert "statics.plan reaches files, and so does stiffness" in faults(texts)


def test_a_circle_inside_a_package_is_reported() -> None:
    """Modules of one package may be in any order but not in a circle."""
    texts = {"sheet.a": "from trusscalc.sheet.b import x", "sheet.b": "from trusscalc.sheet import a"}
    assert any(fault.startswith("imports in a circle: sheet.") for fault in faults(texts))


def test_importing_the_package_loads_nothing_heavy() -> None:
    """``import trusscalc``, and the command line before it draws, stay close to the price of sympy."""
    script = "import sys, trusscalc, trusscalc.__main__; print(*(name.split('.')[0] for name in sys.modules))"
    found = subprocess.run([sys.executable, "-c", script], capture_output=True, text=True, check=True)
    assert HEAVY & set(found.stdout.split()) == set()


# --- the repository ---------------------------------------------------------------------------------------

ROOT = PACKAGE.parent
TOP_LEVEL = {"README.md", "DEVELOPERS.md", "pyproject.toml", "trusscalc", "workbooks", "tests"}


def test_the_continuous_check_runs_the_command_that_readme_gives() -> None:
    """Word for word, so that what is promised to a reader is what is run."""
    script = (ROOT / ".ci" / "run").read_text(encoding="utf-8")
    command, in_browser = [line for line in script.splitlines() if "pytest" in line]
    assert command in (ROOT / "README.md").read_text(encoding="utf-8").splitlines()
    assert in_browser.endswith("-m browser tests/browser")
    assert os.access(ROOT / ".ci" / "run", os.X_OK)


def test_the_top_level_holds_nothing_else() -> None:
    """Hidden files apart."""
    found = {path.name for path in ROOT.iterdir() if not path.name.startswith(".") and path.suffix != ".egg-info"}
    assert found - {"dist", "build", "__pycache__"} == TOP_LEVEL
