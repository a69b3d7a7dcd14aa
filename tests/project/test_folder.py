"""What lies in the project folder, and how large it may grow."""

from __future__ import annotations

import os
import stat
from pathlib import PurePosixPath

import pytest

from tests.project.source import ROOT, Module, modules, tracked_files

TOP = {
    ".ci",
    ".gitignore",
    ".pre-commit-config.yaml",
    "DEVELOPERS.md",
    "README.md",
    "environment.yml",
    "hystkit",
    "notebooks",
    "pyproject.toml",
    "tests",
}
LONGEST_MODULE = 500
LARGEST_FILE = 2_000_000


@pytest.fixture(scope="module")
def files() -> tuple[str, ...]:
    found = tracked_files()
    if found is None:
        pytest.skip("not a git checkout, so there is no list of the project's files")
    return found


def test_top_level_is_fixed(files: tuple[str, ...]) -> None:
    assert {name.split("/")[0] for name in files} == TOP


def test_no_large_files(files: tuple[str, ...]) -> None:
    assert [name for name in files if (ROOT / name).stat().st_size > LARGEST_FILE] == []


def test_every_folder_of_the_package_is_a_package(files: tuple[str, ...]) -> None:
    code = [name for name in files if name.startswith("hystkit/") and name.endswith(".py")]
    folders = {folder for name in code for folder in PurePosixPath(name).parents}
    needed = {str(folder / "__init__.py") for folder in folders if folder.parts}
    assert needed - set(files) == set()
    assert "hystkit/py.typed" in files


@pytest.mark.parametrize("module", modules(), ids=lambda module: module.label)
def test_module_is_short(module: Module) -> None:
    assert module.text.count("\n") <= LONGEST_MODULE


@pytest.mark.parametrize("module", modules(), ids=lambda module: module.label)
def test_module_says_what_it_is_for(module: Module) -> None:
    assert module.text.lstrip().startswith(('"""', 'r"""')) or not module.text.strip()


@pytest.mark.skipif(os.name != "posix", reason="file modes are those of POSIX systems")
def test_ci_script_can_be_run() -> None:
    assert (ROOT / ".ci" / "run").stat().st_mode & stat.S_IXUSR
