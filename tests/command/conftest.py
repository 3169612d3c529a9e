"""The command line as users meet it: in a folder of its own, as a process of its own."""

import os
import subprocess
import sys
from pathlib import Path

import pytest

from ..running.small import SMALL

GROUNDROLL = [sys.executable, "-W", "error", "-m", "groundroll"]


def environment() -> dict[str, str]:
    """The environment of this process, one thread, and no colours or folders of the user's terminal."""
    threads = {name: "1" for name in ("OMP_NUM_THREADS", "OPENBLAS_NUM_THREADS", "NUMBA_NUM_THREADS")}
    return os.environ | threads | {"PYTHONUNBUFFERED": "1"}


class Shell:
    """Runs the command in one folder."""

    def __init__(self, folder: Path):
        self.folder = folder

    def __call__(self, *arguments, **options) -> subprocess.CompletedProcess:
        command = [*GROUNDROLL, *map(str, arguments)]
        return subprocess.run(
            command, cwd=self.folder, env=environment(), capture_output=True, text=True, timeout=240, check=False, **options
        )

    def python(self, code: str) -> subprocess.CompletedProcess:
        command = [sys.executable, "-c", code]
        return subprocess.run(command, cwd=self.folder, env=environment(), capture_output=True, text=True, timeout=240, check=False)

    def start(self, *arguments) -> subprocess.Popen:
        command = [*GROUNDROLL, *map(str, arguments)]
        return subprocess.Popen(
            command, cwd=self.folder, env=environment(), stdout=subprocess.PIPE, stderr=subprocess.PIPE, text=True
        )

    def write(self, name: str, text: str = SMALL) -> Path:
        path = self.folder / name
        path.parent.mkdir(parents=True, exist_ok=True)
        path.write_text(text, encoding="utf-8")
        return path


@pytest.fixture
def shell(tmp_path) -> Shell:
    return Shell(tmp_path)
