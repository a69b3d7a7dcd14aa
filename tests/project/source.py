"""Read the package's own source: its modules, their layers and their imports."""

from __future__ import annotations

import ast
import subprocess
import sys
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

ROOT = Path(__file__).parents[2]
PACKAGE = ROOT / "hystkit"


@dataclass(frozen=True)
class Import:
    """One imported module: its dotted name, where, and whether only a function call imports it."""

    module: str
    line: int
    deferred: bool


@dataclass(frozen=True)
class Module:
    """One module of the package, parsed."""

    path: Path
    text: str

    @property
    def label(self) -> str:
        return self.path.relative_to(ROOT).as_posix()

    @property
    def name(self) -> str:
        parts = self.path.relative_to(ROOT).with_suffix("").parts
        return ".".join(parts[:-1] if parts[-1] == "__init__" else parts)

    @property
    def layer(self) -> str:
        """Folder below the package; empty for the modules at its top."""
        parts = self.path.relative_to(PACKAGE).parts
        return parts[0] if len(parts) > 1 else ""

    @property
    def imports(self) -> tuple[Import, ...]:
        return tuple(imports(self.text, package=self._package))

    @property
    def _package(self) -> str:
        return self.name if self.path.name == "__init__.py" else self.name.rpartition(".")[0]


def modules() -> tuple[Module, ...]:
    """Every module of the package, in a stable order."""
    paths = sorted(PACKAGE.rglob("*.py"))
    return tuple(Module(path, path.read_text(encoding="utf-8")) for path in paths)


def imports(text: str, *, package: str = "") -> Iterator[Import]:
    """Every import in `text`; ``from a import b`` counts as ``a.b``, relative ones are resolved."""
    yield from _walk(ast.parse(text), package, deferred=False)


def _walk(node: ast.AST, package: str, *, deferred: bool) -> Iterator[Import]:
    for child in ast.iter_child_nodes(node):
        if isinstance(child, ast.Import):
            for alias in child.names:
                yield Import(alias.name, child.lineno, deferred)
        elif isinstance(child, ast.ImportFrom):
            base = _absolute(child, package)
            for alias in child.names:
                yield Import(f"{base}.{alias.name}", child.lineno, deferred)
        else:
            inside = isinstance(child, ast.FunctionDef | ast.AsyncFunctionDef | ast.Lambda)
            typing_only = isinstance(child, ast.If) and "TYPE_CHECKING" in ast.dump(child.test)
            yield from _walk(child, package, deferred=deferred or inside or typing_only)


def _absolute(node: ast.ImportFrom, package: str) -> str:
    if not node.level:
        return node.module or ""
    parts = package.split(".")
    parents = parts[: len(parts) - node.level + 1]
    return ".".join([*parents, *([node.module] if node.module else [])])


def tracked_files() -> tuple[str, ...] | None:
    """Files that git knows or would add, or None outside a git checkout."""
    command = ["git", "-c", "safe.directory=*", "ls-files", "-co", "--exclude-standard", "-z"]
    try:
        done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=True)
    except (OSError, subprocess.CalledProcessError):
        return None
    names = [name for name in done.stdout.split("\0") if name]
    return tuple(name for name in names if (ROOT / name).exists())


def run_python(code: str) -> str:
    """What `code` prints in a fresh interpreter that starts in the checkout."""
    command = [sys.executable, "-W", "error::DeprecationWarning:hystkit", "-c", code]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stderr
    return done.stdout
