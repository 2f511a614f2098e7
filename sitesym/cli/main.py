"""The command `sitesym`: a table of subcommands, each loaded only when it is called.

Exit codes: 0 done; 1 the answer to a yes-or-no question is no; 2 usage; 3 input not readable or not valid.
"""

from __future__ import annotations

import importlib
import signal
from typing import Any, Final

import click

from sitesym import __version__
from sitesym.errors import SitesymError, UsageError

EXIT_USAGE: Final = 2
EXIT_INPUT: Final = 3
EXIT_INTERRUPTED: Final = 128 + signal.SIGINT

#: Name of each subcommand and what it does; its module is sitesym.cli.<name>.
COMMANDS: Final = {
    "sites": "Sites of a crystal: orbit, Wyckoff letter, site symmetry.",
    "allowed": "Tensor components that symmetry allows, and their relations.",
    "irreps": "Irreducible representations and their characters.",
    "audit": "Measured tensors against the symmetry of their crystals.",
    "screen": "A folder of structures: one row of verdicts each.",
    "table": "Rows of a store of screening results, chosen and sorted.",
    "conventions": "The axes, orders, factors and words the output uses.",
}


class CommandTable(click.Group):
    """A group that imports a subcommand when it is asked for, and turns sitesym's errors into exit codes."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Names in the order of the table."""
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """The subcommand, imported now; None for an unknown name."""
        if cmd_name not in COMMANDS:
            return None
        command: click.Command = importlib.import_module(f"sitesym.cli.{cmd_name}").command
        return command

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """The list in ``--help``, written from the table without importing any subcommand."""
        with formatter.section("Commands"):
            formatter.write_dl(list(COMMANDS.items()))

    def invoke(self, ctx: click.Context) -> Any:
        """Run the subcommand; errors of sitesym and Ctrl-C go to standard error, without a traceback."""
        try:
            return super().invoke(ctx)
        except (KeyboardInterrupt, click.Abort):
            click.echo("stopped by SIGINT", err=True)
            ctx.exit(EXIT_INTERRUPTED)
        except SitesymError as error:
            click.echo(f"error: {error}", err=True)
            ctx.exit(EXIT_USAGE if isinstance(error, UsageError) else EXIT_INPUT)


@click.group(
    cls=CommandTable, context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 100}
)
@click.version_option(__version__, prog_name="sitesym")
def main() -> None:
    """From a crystal structure file to its site symmetries, irreps and allowed tensor components.

    Exit codes: 0 done; 1 the answer is no; 2 usage; 3 input not readable or not valid; 130 Ctrl-C.
    """
