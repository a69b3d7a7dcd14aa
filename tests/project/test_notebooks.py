"""Notebooks are stored as they ran: every cell executed in order, with its outputs."""

from __future__ import annotations

import ast
import json
from pathlib import Path
from typing import Any

import pytest

from tests.project.source import ROOT

NOTEBOOKS = sorted((ROOT / "notebooks").glob("*.ipynb"))

Cell = dict[str, Any]


def source(cell: Cell) -> str:
    return "".join(cell["source"])


def code_cells(path: Path) -> list[Cell]:
    cells = json.loads(path.read_text(encoding="utf-8"))["cells"]
    return [cell for cell in cells if cell["cell_type"] == "code" and source(cell).strip()]


def shows_something(cell: Cell) -> bool:
    """Whether the last line of a cell is a bare expression, which a notebook displays."""
    body = ast.parse(source(cell)).body
    return bool(body) and isinstance(body[-1], ast.Expr)


def test_there_is_a_notebook() -> None:
    assert "explore_trip_points.ipynb" in [path.name for path in NOTEBOOKS]


@pytest.mark.parametrize("path", NOTEBOOKS, ids=lambda path: path.name)
def test_every_cell_was_run_in_order(path: Path) -> None:
    counts = [cell["execution_count"] for cell in code_cells(path)]
    assert counts == list(range(1, len(counts) + 1))


@pytest.mark.parametrize("path", NOTEBOOKS, ids=lambda path: path.name)
def test_outputs_are_stored(path: Path) -> None:
    showing = [cell for cell in code_cells(path) if shows_something(cell)]
    assert showing
    silent = [source(cell) for cell in showing if not cell["outputs"]]
    assert silent == []


@pytest.mark.parametrize("path", NOTEBOOKS, ids=lambda path: path.name)
def test_no_stored_errors(path: Path) -> None:
    kinds = {output["output_type"] for cell in code_cells(path) for output in cell["outputs"]}
    assert "error" not in kinds
    streams = {
        output["name"]
        for cell in code_cells(path)
        for output in cell["outputs"]
        if output["output_type"] == "stream"
    }
    assert "stderr" not in streams


@pytest.mark.parametrize("path", NOTEBOOKS, ids=lambda path: path.name)
def test_cells_only_call(path: Path) -> None:
    defining = (ast.FunctionDef, ast.AsyncFunctionDef, ast.ClassDef, ast.Lambda)
    for cell in code_cells(path):
        nodes = list(ast.walk(ast.parse(source(cell))))
        assert not [node for node in nodes if isinstance(node, defining)], source(cell)
        assert not source(cell).rstrip().endswith(";")
