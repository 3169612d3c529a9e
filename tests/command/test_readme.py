"""README: its table of keys is the schema's, and every command and every line of Python and TOML in it works.

The commands run in a copy of the repository whose scenarios are cheaper, and whose environment is this one: the
script's installer is called, but what it is told to install lies there already.
"""

import os
import re
import shutil
import subprocess
import sys
from pathlib import Path

import pytest

from groundroll import Scenario, open_records
from groundroll.scenario import keys_table

from ..running.shorten import shortened
from .conftest import environment

ROOT = Path(__file__).parents[2]
README = (ROOT / "README.md").read_text(encoding="utf-8")
PYTHON = """#!/bin/sh
# Stands for the environment's Python; keeps pip's arguments and installs nothing.
if [ "$2" = pip ]; then echo "$@" >> "{folder}/pip.log"; exit 0; fi
exec "{python}" "$@"
"""
GROUNDROLL = '#!/bin/sh\nexec "{python}" -m groundroll "$@"\n'


def blocks(kind: str) -> list[str]:
    return re.findall(rf"^```{kind}\n(.*?)^```$", README, re.MULTILINE | re.DOTALL)


@pytest.fixture(scope="module")
def copy(tmp_path_factory):
    """A copy of the repository; the environment variable PATH in which neither uv nor a Python is found."""
    folder = tmp_path_factory.mktemp("copy")
    for name in ("README.md", "pyproject.toml"):
        shutil.copy(ROOT / name, folder)
    shutil.copytree(ROOT / "scripts", folder / "scripts")
    (folder / "configs").mkdir()
    for path in (ROOT / "configs").glob("*.toml"):
        (folder / "configs" / path.name).write_text(shortened(path.read_text(encoding="utf-8"), 5.0, 0.2), encoding="utf-8")
    (folder / "tests").mkdir()
    (folder / "tests" / "test_one.py").write_text("import groundroll\n\ndef test_one():\n    assert groundroll.plan\n")
    for name, text in (("python", PYTHON), ("groundroll", GROUNDROLL)):
        tool = folder / ".venv" / "bin" / name
        tool.parent.mkdir(parents=True, exist_ok=True)
        tool.write_text(text.format(folder=folder, python=sys.executable))
        tool.chmod(0o755)
    tools = folder / "tools"
    tools.mkdir()
    for name in ("bash", "sh", "basename", "cat", "cksum", "dirname", "find", "rm", "tr"):
        (tools / name).symlink_to(shutil.which(name))
    return folder


def bash(copy, text: str, folder=None, **variables):
    surroundings = environment() | {"PATH": str(copy / "tools")} | variables
    return subprocess.run(
        ["bash", "-euc", text], cwd=folder or copy, env=surroundings, capture_output=True, text=True, timeout=240, check=False
    )


def test_the_table_of_keys_is_that_of_the_schema():
    assert README.endswith(keys_table())


def test_every_command_line_of_the_readme_is_in_a_block_that_is_run():
    for line in README.splitlines():
        if re.match(r"\s*(\$ |bash |\.venv/bin/|pip |python )", line):
            assert any(line in block for block in blocks("sh")), line


def test_the_shell_blocks_run_in_turn(copy):
    assert len(blocks("sh")) == 3
    for block in blocks("sh"):
        # The template of `new` is a whole second of ground; here a quarter is enough.
        for line in block.splitlines():
            done = bash(copy, line)
            assert done.returncode == 0, (line, done.stdout, done.stderr)
            if " new " in line:
                first = copy / "first.toml"
                first.write_text(shortened(first.read_text(), 2.0, 0.3))
    for folder in ("pile_by_clinic", "first"):
        assert open_records(copy / "outputs" / folder).complete
        assert list((copy / "outputs" / folder / "figures").glob("*.png"))


def test_the_python_blocks_run_after_them(copy):
    assert len(blocks("python")) == 2
    done = subprocess.run(
        [sys.executable, "-W", "error", "-c", "\n".join(blocks("python"))],
        cwd=copy, env=environment(), capture_output=True, text=True, timeout=240, check=False,
    )  # fmt: skip
    assert (done.returncode, done.stderr) == (0, "")
    assert "True 0.0" in done.stdout and "velocity_z" in done.stdout


def test_the_scenario_explained_is_one():
    (block,) = blocks("toml")
    scenario = Scenario.from_text(block)
    assert scenario.receivers[0].count == 36
    assert scenario.sources[0].pulse.frequency == 20.0


def test_files_named_in_the_readme_are_there():
    for name in re.findall(r"\((configs[\w/.]*)\)", README) + re.findall(r"`(tests/[\w/]+\.py)`", README):
        assert (ROOT / name).exists(), name


def test_first_run_from_another_folder_takes_a_scenario_from_there_and_says_where_all_lies(copy, tmp_path):
    shutil.copy(copy / "configs" / "levee_hammer_line.toml", tmp_path / "mine.toml")
    done = bash(copy, f"bash {copy}/scripts/first_run.sh mine.toml", folder=tmp_path)
    assert done.returncode == 0, done.stderr
    folder = copy / "outputs" / "mine"
    assert done.stdout.splitlines()[-2:] == [f"records: {folder}/records.h5", f"figures: {folder}/figures"]
    assert "peak velocity (mm/s)" in done.stdout and "\nspread " in done.stdout
    assert open_records(folder).complete and list((folder / "figures").glob("*.png"))
    assert [path.name for path in tmp_path.iterdir()] == ["mine.toml"]


def test_the_scripts_install_locked_versions_once(copy):
    (copy / "pip.log").unlink(missing_ok=True)
    for mark in (copy / ".venv").glob("installed.*"):
        mark.unlink()
    for _ in range(2):
        done = bash(copy, "bash scripts/run_tests.sh tests/test_one.py")
        assert done.returncode == 0 and "passed" in done.stdout, done.stdout
    wanted = "-m pip install --quiet --disable-pip-version-check --constraint scripts/constraints.txt --editable .[test]\n"
    assert (copy / "pip.log").read_text() == wanted


def test_run_tests_passes_on_what_pytest_says(copy):
    assert bash(copy, "bash scripts/run_tests.sh tests/no_such_test.py").returncode == 4


def fake(folder: Path, name: str, text: str) -> None:
    tool = folder / name
    tool.write_text(f"#!/bin/sh\n{text}\n")
    tool.chmod(0o755)


def bare(copy, tmp_path, **tools: str):
    """Run the first script in a copy without environment, where only the tools given are found beside the shell's."""
    folder = tmp_path / "bare"
    shutil.copytree(copy, folder, ignore=shutil.ignore_patterns(".venv", "outputs"), symlinks=True)
    for name, text in tools.items():
        fake(folder / "tools", name, text)
    return folder, bash(folder, "bash scripts/first_run.sh")


def test_an_old_python_is_named(copy, tmp_path):
    _, done = bare(copy, tmp_path, python3='[ "$1" = --version ] && echo "Python 3.9.2" && exit 0; exit 1')
    assert done.returncode == 1 and done.stdout == ""
    assert done.stderr.splitlines()[0] == "groundroll needs Python 3.11 to 3.14; found: Python 3.9.2."
    assert "apt install python3.12 python3.12-venv" in done.stderr


def test_no_python_at_all_is_said(copy, tmp_path):
    _, done = bare(copy, tmp_path)
    assert done.returncode == 1
    assert done.stderr.splitlines()[0] == "groundroll needs Python 3.11 to 3.14; found: none."


def test_a_python_without_ensurepip_is_sent_for_python3_venv(copy, tmp_path):
    python = f'case "$*" in *ensurepip*) exit 1;; esac; exec "{sys.executable}" "$@"'
    folder, done = bare(copy, tmp_path, python3=python)
    assert done.returncode == 1
    assert done.stderr.splitlines()[0].endswith("python3 cannot make virtual environments: its module ensurepip is missing.")
    assert "apt install python3-venv" in done.stderr
    assert not (folder / ".venv").exists()


def test_uv_is_used_where_it_is_found(copy, tmp_path):
    log = tmp_path / "uv.log"
    uv = f'echo "$@" >> {log}; [ "$1" = venv ] || exit 7; mkdir -p .venv/bin; cp -r {copy}/.venv/bin .venv/'
    _, done = bare(copy, tmp_path, uv=uv, python3=f'exec "{sys.executable}" "$@"', mkdir=f'exec {shutil.which("mkdir")} "$@"', cp=f'exec {shutil.which("cp")} "$@"')
    assert done.returncode == 7  # what uv pip says ends the script
    venv, pip = log.read_text().splitlines()
    assert re.fullmatch(r"venv --quiet --seed --python \S+/python3 \.venv", venv)
    assert pip == "pip install --quiet --python .venv/bin/python --constraint scripts/constraints.txt --editable ."


def test_every_dependency_has_a_locked_version():
    import tomllib

    project = tomllib.loads((ROOT / "pyproject.toml").read_text())["project"]
    wanted = [re.match(r"[\w-]+", text)[0].lower() for text in (*project["dependencies"], *project["optional-dependencies"]["test"])]
    lines = (ROOT / "scripts" / "constraints.txt").read_text().splitlines()
    locked = dict(line.lower().split("==") for line in lines if not line.startswith("#"))
    assert set(wanted) <= set(locked)


def test_ci_calls_the_tests_and_nothing_else():
    text = (ROOT / ".ci" / "run").read_text().splitlines()
    assert text[-1] == 'bash "$(dirname "${BASH_SOURCE[0]}")/../scripts/run_tests.sh"'
    assert len(text) == 3 and os.access(ROOT / ".ci" / "run", os.X_OK)
