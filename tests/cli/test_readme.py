"""The README shows what the program prints, and its Python runs."""

from __future__ import annotations

import re
import shlex
from collections.abc import Callable
from pathlib import Path

import pytest
from click.testing import Result

ROOT = Path(__file__).parents[2]
README = (ROOT / "README.md").read_text(encoding="utf-8")
CONSOLE = re.findall(r"```console\n\$ sitesym (.*?)\n(.*?)```", README, flags=re.DOTALL)
PYTHON = re.findall(r"```python\n(.*?)```", README, flags=re.DOTALL)


@pytest.mark.parametrize(("command", "shown"), CONSOLE, ids=[command for command, _ in CONSOLE])
def test_shown_output_is_what_the_command_prints(
    command: str, shown: str, run: Callable[..., Result], monkeypatch: pytest.MonkeyPatch
) -> None:
    """A line [...] stands for any number of lines; rounding errors after 'to' may differ between machines."""
    monkeypatch.chdir(ROOT)
    printed = _without_rounding(run(*shlex.split(command)).output)
    parts = [re.escape(part) for part in _without_rounding(shown).split("[...]\n")]
    assert re.fullmatch(r"(?:.*\n)*?".join(parts), printed), printed


def test_the_readme_shows_five_commands() -> None:
    shown = sorted(command.split()[0] for command, _ in CONSOLE)
    assert shown == ["allowed", "audit", "irreps", "screen", "sites"]


@pytest.mark.parametrize("source", PYTHON)
def test_the_python_example_prints_what_its_comments_say(
    source: str, capsys: pytest.CaptureFixture[str], monkeypatch: pytest.MonkeyPatch
) -> None:
    monkeypatch.chdir(ROOT)
    exec(compile(source, "README.md", "exec"), {})
    printed = capsys.readouterr().out
    assert printed.startswith("P3_121 321\n('11', '14')\n[[ 2.3")


def _without_rounding(text: str) -> str:
    return re.sub(r"\(to \de[+-]\d+\)", "(to rounding)", text)
