"""The ``rca`` command: one module a subcommand, imported only when it is called."""

import importlib

import click

from rca import __version__

COMMANDS = {
    "new": "Make a case folder that already passes the check.",
    "check": "What of a case is usable, wrong or missing.",
    "report": "Run the notebooks, write the report folder; many cases at once too.",
    "rerun": "The auditor's rerun: recompute, compare, say what differs and why.",
    "bundle": "One archive with evidence, notebooks, results and report.",
    "actions": "Corrective actions across cases: due, overdue, proved or not.",
    "compare": "Past incidents side by side: what recurs, what is alike, what helped.",
}


class LazyGroup(click.Group):
    """Subcommands by name; a module of ``rca.cli`` holds each as ``command``."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        """Names in order of use."""
        del ctx
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        """Import the subcommand."""
        del ctx
        if cmd_name not in COMMANDS:
            return None
        module = importlib.import_module(f"rca.cli.{cmd_name}")
        command: click.Command = module.command
        return command

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        """List the subcommands without importing them."""
        del ctx
        with formatter.section("Commands"):
            formatter.write_dl(list(COMMANDS.items()))


@click.command(cls=LazyGroup)
@click.version_option(__version__, prog_name="rca")
def main() -> None:
    """Root-cause reports for failed hydraulic pumps.

    Suction-side cavitation or air release, discharge-side micro-dieseling, both, or neither.
    Exit status: 0 done; 1 done, and the answer is no; 2 could not be done.
    """
