"""The frame that commands hang in: a group that imports a command when it is used."""

from __future__ import annotations

import importlib
import os
from typing import TYPE_CHECKING, Any

import typer
from typer.core import TyperGroup

from formbuf.cli.registry import COMMANDS

if TYPE_CHECKING:
    from collections.abc import Sequence

#: Set by the shell while it asks for completions.
COMPLETING = "_FORMBUF_COMPLETE"
#: Settings of every command: help has two names, and its lines may be long.
SETTINGS = {"help_option_names": ["-h", "--help"], "max_content_width": 88}


def command_app(help_text: str | None = None) -> typer.Typer:
    """Return an empty application for one command module.

    Parameters
    ----------
    help_text : str, optional
        Help of a command that only holds sub-commands.
    """
    return typer.Typer(
        help=help_text,
        rich_markup_mode=None,
        add_completion=False,
        pretty_exceptions_enable=False,
        no_args_is_help=True,
        context_settings=dict(SETTINGS),
    )


def examples(*lines: str) -> str:
    """Return command lines as the closing part of a help text, kept line by line."""
    return "\b\nExamples:\n" + "\n".join(f"  {line}" for line in lines)


class LazyGroup(TyperGroup):
    """A group that lists its commands from a table and imports one when it is used."""

    def list_commands(self, ctx: Any) -> list[str]:
        """Return the names in the order of the table."""
        return list(COMMANDS)

    def get_command(self, ctx: Any, cmd_name: str) -> Any:
        """Import and return one command; None for a name that is not in the table."""
        entry = COMMANDS.get(cmd_name)
        if entry is None:
            return None
        if cmd_name not in self.commands:
            module = importlib.import_module(entry.module)
            command = typer.main.get_command(module.app)
            command.name = cmd_name
            if COMPLETING in os.environ:
                from formbuf.cli.complete import attach

                attach(command)
            self.commands[cmd_name] = command
        return self.commands[cmd_name]

    def resolve_command(self, ctx: Any, args: Sequence[str]) -> Any:
        """Refuse a name that is not in the table, with the nearest one."""
        from formbuf.errors import UsageError, nearest

        name = args[0]
        if name not in COMMANDS and not name.startswith("-"):
            near = nearest(name, COMMANDS, 1)
            hint = f"Did you mean `formbuf {near[0]}`?" if near else ""
            allowed = ", ".join(COMMANDS)
            msg = f"there is no command {name!r}, allowed {allowed}"
            raise UsageError(msg, hint=hint or "Run `formbuf --help`.")
        return super().resolve_command(ctx, list(args))

    def format_commands(self, ctx: Any, formatter: Any) -> None:
        """Write the list of commands from the table; no command is imported."""
        with formatter.section("Commands"):
            formatter.write_dl([(name, entry.help) for name, entry in COMMANDS.items()])

    def shell_complete(self, ctx: Any, incomplete: str) -> Any:
        """Complete names of commands without importing them."""
        from typer.core import TyperCommand

        for name, entry in COMMANDS.items():
            if name.startswith(incomplete) and name not in self.commands:
                self.commands[name] = TyperCommand(name, short_help=entry.help)
        return super().shell_complete(ctx, incomplete)
