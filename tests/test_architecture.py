"""The order of the modules, read from their imports; and the house rules that a parser can see."""

import ast
from collections.abc import Iterator
from functools import cache
from pathlib import Path

import pytest

import front3d

PACKAGE = Path(front3d.__file__).parent

RANKS = [
    # Each module of front3d imports only from lines above its own, or from its own package.
    {"errors", "caution"},
    {"arrays"},
    {"loads", "combination"},
    {"elements", "units", "options"},
    {"solid"},
    {"steps"},
    {"jit", "threads"},
    {"places"},
    {"reading"},
    {"crack"},
    {"fields"},
    # Results are the records that the methods fill in; no mathematics of theirs: hence before.
    {"results"},
    {"mixing"},
    {"methods"},
    {"handbook"},
    {"evidence"},
    {"sanity"},
    {"flags"},
    {"pipeline"},
    {"samples"},
    {"output"},
    {"verification"},
    {"case"},
    {"job"},
    {"batch"},
    {"cli"},
    {"__main__"},
]
RANK = {module: rank for rank, modules in enumerate(RANKS) for module in modules}

FILES = sorted(PACKAGE.rglob("*.py"))


@cache
def tree(path: Path) -> ast.Module:
    return ast.parse(path.read_text(encoding="utf-8"), str(path))


def name_of(path: Path) -> list[str]:
    return [part for part in path.relative_to(PACKAGE).with_suffix("").parts if part != "__init__"]


def imports(path: Path) -> Iterator[tuple[str, int]]:
    """Every imported module, dotted, with its line; imports inside functions count, too."""
    for node in ast.walk(tree(path)):
        if isinstance(node, ast.Import):
            yield from ((alias.name, node.lineno) for alias in node.names)
        elif isinstance(node, ast.ImportFrom):
            assert node.level == 0, f"{path}:{node.lineno}: a relative import hides its target"
            base = node.module or ""
            yield base, node.lineno
            yield from ((f"{base}.{alias.name}", node.lineno) for alias in node.names)


def inner_imports(path: Path) -> Iterator[tuple[list[str], int]]:
    """Imports of parts of front3d, as their names below the package."""
    for module, line in imports(path):
        first, *rest = module.split(".")
        if first == "front3d" and rest:
            yield rest, line


def violations(path: Path) -> list[str]:
    own = name_of(path)
    if not own:  # the package itself only opens the way to what stands below it, lazily
        return []
    found = []
    for target, line in inner_imports(path):
        if target[0] in ("__version__", "__file__") or target[0] == own[0]:
            continue
        if RANK[target[0]] >= RANK[own[0]]:
            found.append(f"{'.'.join(own)}:{line} imports {'.'.join(target)}")
    return found


def test_every_module_has_a_rank() -> None:
    assert {name_of(path)[0] for path in FILES if name_of(path)} <= set(RANK)


@pytest.mark.parametrize("path", FILES, ids=lambda path: ".".join(name_of(path)) or "front3d")
def test_imports_point_one_way(path: Path) -> None:
    assert violations(path) == []


def test_methods_never_import_each_other() -> None:
    """The registry (methods/__init__.py) knows the methods; a method knows none but itself."""
    registry = PACKAGE / "methods" / "__init__.py"
    registered = {
        target[1] for target, _ in inner_imports(registry) if target[0] == "methods" and target[1:]
    }
    methods = {name for name in registered if (PACKAGE / "methods" / f"{name}.py").exists()}
    methods -= {"context"}  # what each is given, not a method
    assert methods
    for method in methods:
        used = {
            target[1]
            for target, _ in inner_imports(PACKAGE / "methods" / f"{method}.py")
            if target[0] == "methods" and target[1:]
        }
        assert not used & (methods - {method})


@pytest.mark.parametrize("path", FILES, ids=lambda path: ".".join(name_of(path)) or "front3d")
def test_only_the_command_line_prints_or_exits(path: Path) -> None:
    if name_of(path)[:1] in (["cli"], ["__main__"]):
        return
    forbidden = {"print", "input", "exit", "quit", "breakpoint", "sys.exit", "os._exit", "os.abort"}
    forbidden |= {"sys.stdout.write", "sys.stderr.write"}
    for node in ast.walk(tree(path)):
        if isinstance(node, ast.Call):
            called = ast.unparse(node.func)
            assert called not in forbidden, f"{path}:{node.lineno}: {called}"
        if isinstance(node, ast.Raise) and node.exc is not None:
            assert "SystemExit" not in ast.unparse(node.exc), f"{path}:{node.lineno}"


def test_no_file_is_beyond_400_lines() -> None:
    folders = [PACKAGE.parent / name for name in ("tests", "examples", "benchmarks")]
    files = [*FILES, *(path for folder in folders for path in folder.rglob("*.py"))]
    lengths = {str(p): len(p.read_text(encoding="utf-8").splitlines()) for p in files}
    assert {path: n for path, n in lengths.items() if n > 400} == {}


def test_the_whole_of_vtk_is_never_imported() -> None:
    # It takes 1.6 s; `vtkmodules.X` takes what is needed.
    for path in FILES:
        assert not {"vtk"} & {module.split(".")[0] for module, _ in imports(path)}, path


def test_the_command_line_starts_without_numerical_libraries() -> None:
    """What cli, case and their imports load at the top of their files, followed by hand."""
    heavy = {"numpy", "scipy", "numba", "meshio", "pyvista", "matplotlib", "rich", "vtkmodules"}
    seen: set[Path] = set()
    todo = [PACKAGE / "cli" / "__init__.py", PACKAGE / "__init__.py"]
    while todo:
        path = todo.pop()
        if path in seen:
            continue
        seen.add(path)
        for node in _top_level_imports(path):
            names = (
                [alias.name for alias in node.names]
                if isinstance(node, ast.Import)
                else [f"{node.module}.{a.name}" for a in node.names] + [str(node.module)]
            )
            for name in names:
                assert name.split(".")[0] not in heavy, f"{path}:{node.lineno}: {name}"
                todo += [file for file in _files_of(name) if file.exists()]
    assert PACKAGE / "cli" / "parser.py" in seen
    assert PACKAGE / "case.py" in seen


def _top_level_imports(path: Path) -> Iterator[ast.Import | ast.ImportFrom]:
    for node in tree(path).body:
        if isinstance(node, ast.Import | ast.ImportFrom):
            yield node


def _files_of(name: str) -> list[Path]:
    first, *rest = name.split(".")
    if first != "front3d" or not rest:
        return []
    base = PACKAGE.joinpath(*rest)
    return [base.with_suffix(".py"), base / "__init__.py"]
