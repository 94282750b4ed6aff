"""The command line under hard use: full disk, closed folder, full output.

Broken pipe and Ctrl-C are in test_cli.py, the same bytes of a second run in test_run_folder.py.
"""

import errno
import os
import subprocess
import sys
from pathlib import Path

import pytest
from shipped import GEOMETRIES

from cupfem.cli import main
from cupfem.exchange import place

ROOT = Path(__file__).parents[1]
CUP = str(GEOMETRIES / "single_board.toml")
COMMAND = [sys.executable, "-c", "from cupfem.cli import main; main()"]
QUICK = ["--duration", "20 s", "--fineness", "0.5"]


def refused(capsys, arguments):
    """Status and the one line on standard error."""
    with pytest.raises(SystemExit) as ended:
        main(arguments)
    (line,) = capsys.readouterr().err.splitlines()
    return ended.value.code, line


def test_a_full_disk_is_one_line(tmp_path, monkeypatch, capsys):
    """Each write fails as on a full disk (ENOSPC, errno.h); nothing is left behind."""
    monkeypatch.chdir(tmp_path)

    def full(*arguments, **options):
        raise OSError(errno.ENOSPC, os.strerror(errno.ENOSPC))

    monkeypatch.setattr(place.os, "rename", full)
    status, line = refused(capsys, ["pour", CUP, *QUICK, "--out", "run", "--quiet"])
    assert status == 2
    assert "run folder" in line and "full" in line
    assert not list(tmp_path.iterdir())


def test_a_folder_that_is_closed_is_refused_before_the_run(tmp_path, monkeypatch, capsys):
    monkeypatch.setattr(place.os, "access", lambda *arguments, **options: False)
    status, line = refused(capsys, ["pour", CUP, "--out", str(tmp_path / "run"), "--quiet"])
    assert status == 2
    assert "run folder" in line
    assert not list(tmp_path.iterdir())


@pytest.mark.parametrize("arguments", [["materials"], ["materials", "cork"], ["--help"]])
def test_an_output_that_is_full_is_one_line(arguments):
    """Standard output on the device that is always full (full(4), Linux)."""
    with Path("/dev/full").open("w") as full:
        line, told = [*COMMAND, *arguments], subprocess.PIPE
        done = subprocess.run(line, cwd=ROOT, stdout=full, stderr=told, text=True, check=False)
    assert done.returncode == 2
    assert done.stderr == "cupfem: standard output: no space left on device\n"
