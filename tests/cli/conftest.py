"""Running the command inside the test process."""

from __future__ import annotations

import json
from collections.abc import Callable
from pathlib import Path
from typing import Any

import pytest
from click.testing import CliRunner, Result

from sitesym.cli.main import main

STRUCTURES = Path(__file__).parents[2] / "structures"


@pytest.fixture
def quartz() -> str:
    """Path of the quartz of the demo."""
    return str(STRUCTURES / "quartz_SiO2.cif")


@pytest.fixture
def structures() -> str:
    """Path of the folder of demo structures."""
    return str(STRUCTURES)


@pytest.fixture
def run() -> Callable[..., Result]:
    """Call the command with these arguments."""
    return lambda *arguments: CliRunner().invoke(main, list(arguments))


@pytest.fixture
def document(run: Callable[..., Result]) -> Callable[..., dict[str, Any]]:
    """Call the command, which must succeed, and parse its JSON strictly."""

    def call(*arguments: str) -> dict[str, Any]:
        result = run(*arguments, "--format", "json")
        assert result.exit_code == 0, result.output
        parsed: dict[str, Any] = json.loads(result.output, parse_constant=_refuse)
        return parsed

    return call


def _refuse(constant: str) -> None:
    raise ValueError(f"{constant} is no strict JSON")
