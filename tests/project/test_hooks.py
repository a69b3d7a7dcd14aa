"""Commit hooks run what CI runs, and fetch nothing."""

from __future__ import annotations

import subprocess
import sys

import yaml

from tests.project.source import ROOT

CONFIG = yaml.safe_load((ROOT / ".pre-commit-config.yaml").read_text(encoding="utf-8"))


def test_every_hook_is_local() -> None:
    assert {entry["repo"] for entry in CONFIG["repos"]} == {"local"}
    languages = {hook["language"] for entry in CONFIG["repos"] for hook in entry["hooks"]}
    assert languages <= {"system", "pygrep"}


def test_lint_format_and_types_are_checked() -> None:
    entries = " ; ".join(hook["entry"] for entry in CONFIG["repos"] for hook in entry["hooks"])
    for command in ("ruff check", "ruff format --check", "mypy"):
        assert command in entries


def test_configuration_is_valid() -> None:
    command = [sys.executable, "-m", "pre_commit", "validate-config", ".pre-commit-config.yaml"]
    done = subprocess.run(command, cwd=ROOT, capture_output=True, text=True, check=False)
    assert done.returncode == 0, done.stdout + done.stderr


def test_ci_runs_the_hooks_the_benchmarks_and_the_readme() -> None:
    script = (ROOT / ".ci" / "run").read_text(encoding="utf-8")
    for piece in ("pre_commit run --all-files", "tests.benchmarks", "tests.project.readme"):
        assert piece in script
