"""The command as a process: what it imports, its help, its exit codes."""

from __future__ import annotations

import subprocess
import sys
from pathlib import Path

import pytest
from click.testing import CliRunner

from sitesym.cli.main import COMMANDS, main

HEAVY = {"ase", "pandas", "scipy", "matplotlib", "spglib", "gemmi", "moyopy", "numpy", "rich"}

PROBE = """
import sys
from sitesym.cli.main import main
sys.argv = ["sitesym", *{arguments!r}]
try:
    main()
except SystemExit as stop:
    sys.stderr.write("|".join([str(stop.code), *(name for name in sys.modules if "." not in name)]))
"""


def loaded_modules(*arguments: str) -> set[str]:
    """Top-level modules that a run of the command leaves loaded; the run must succeed."""
    script = PROBE.format(arguments=list(arguments))
    run = subprocess.run(
        [sys.executable, "-c", script], capture_output=True, text=True, check=True, timeout=120
    )
    code, *modules = run.stderr.split("|")
    assert code == "0", run.stderr
    return set(modules)


def test_help_loads_no_heavy_library() -> None:
    assert not HEAVY & loaded_modules("--help")


@pytest.mark.parametrize("command", ["allowed", "irreps"])
def test_a_group_by_symbol_loads_no_crystal_library(command: str) -> None:
    loaded = loaded_modules(command, "--group", "32")
    assert "numpy" in loaded
    assert not (HEAVY - {"numpy", "rich"}) & loaded


def test_help_lists_every_command_with_its_purpose() -> None:
    text = CliRunner().invoke(main, ["--help"]).output
    for name, purpose in COMMANDS.items():
        assert name in text
        assert purpose in text


@pytest.mark.parametrize("name", COMMANDS)
def test_every_command_of_the_table_exists_and_explains_itself(name: str) -> None:
    result = CliRunner().invoke(main, [name, "--help"])
    assert result.exit_code == 0
    assert "--format" in result.output
    assert "--output" in result.output


def test_an_unknown_command_is_a_usage_error() -> None:
    result = CliRunner().invoke(main, ["melt"])
    assert result.exit_code == 2
    assert "melt" in result.output


def test_version_is_printed() -> None:
    assert CliRunner().invoke(main, ["--version"]).output.startswith("sitesym, version ")


@pytest.mark.skipif(not Path("/dev/full").exists(), reason="no device that is always full")
def test_standard_output_that_takes_nothing_is_an_error_and_no_answer() -> None:
    code = "from sitesym.cli.main import main; main(['conventions'], prog_name='sitesym')"
    with open("/dev/full", "w", encoding="utf-8") as full:
        run = subprocess.run([sys.executable, "-c", code], stdout=full, stderr=subprocess.PIPE, text=True)
    assert run.returncode == 2
    assert "the output cannot be written" in run.stderr
    assert "Traceback" not in run.stderr


def test_an_interruption_ends_with_the_code_of_its_signal(monkeypatch: pytest.MonkeyPatch) -> None:
    def interrupted(*_: object) -> None:
        raise KeyboardInterrupt

    monkeypatch.setattr("sitesym.cli.output.write_pieces", interrupted)
    result = CliRunner().invoke(main, ["conventions"])
    assert result.exit_code == 130
    assert result.stderr == "stopped by SIGINT\n"
