"""The commands: words in, records out."""

from __future__ import annotations

import importlib
import sys
from collections.abc import Sequence

import click

from steplaw.errors import SteplawError

COMMANDS = {
    "audit": "Find the law that a function's step count follows.",
    "derive": "Work out from the source how often each line runs.",
    "forecast": "Foretell steps and time at sizes that are not run.",
    "versus": "Compare two subjects: where does one overtake the other?",
    "worst": "Search for the input of a size that costs most.",
    "typical": "Find how a figure is spread over its inputs.",
    "life": "Count each operation on one structure, and their mean.",
    "space": "Find what is held at the peak: elements and memory.",
    "budget": "Keep agreed laws of studies, and hold the code to them.",
    "tally": "Run a program under probes and count its steps.",
    "show": "Show a stored record.",
    "store": "List, prune or export the finished runs that are kept.",
}
EPILOG = (
    "Auditing runs the subject's code. A law holds for the inputs it was found on. None of it is "
    "a worst-case execution time for a safety-related deadline; that belongs to the qualified "
    "process that the applicable standard asks for."
)


class _Lazy(click.Group):
    """A group whose commands are imported when they are asked for."""

    def list_commands(self, ctx: click.Context) -> list[str]:
        return list(COMMANDS)

    def get_command(self, ctx: click.Context, cmd_name: str) -> click.Command | None:
        if cmd_name not in COMMANDS:
            return None
        module = importlib.import_module(f"steplaw.commands.{cmd_name}")
        command: click.Command = module.command
        return command

    def resolve_command(
        self, ctx: click.Context, args: list[str]
    ) -> tuple[str | None, click.Command | None, list[str]]:
        if args and args[0] not in COMMANDS and not args[0].startswith("-"):
            if ":" in args[0]:
                raise click.UsageError(f"'{args[0]}' is a subject: type steplaw audit {args[0]}")
            known = ", ".join(COMMANDS)
            raise click.UsageError(f"there is no command '{args[0]}': type one of {known}")
        return super().resolve_command(ctx, args)

    def format_commands(self, ctx: click.Context, formatter: click.HelpFormatter) -> None:
        with formatter.section("Commands"):
            formatter.write_dl(list(COMMANDS.items()))


@click.group(
    cls=_Lazy,
    epilog=EPILOG,
    context_settings={"help_option_names": ["-h", "--help"], "max_content_width": 80},
)
@click.version_option(package_name="steplaw", prog_name="steplaw")
def steplaw() -> None:
    """Count the bytecode instructions a Python function runs, and find their law."""


def run(words: Sequence[str]) -> int:
    """Run a command line.

    Parameters
    ----------
    words : sequence of str
        The words after ``steplaw``.

    Returns
    -------
    int
        The exit status: 0 done, 1 a check did not hold, 2 the call was wrong, 3 the subject
        failed or ran past a limit.
    """
    try:
        status = steplaw.main(args=list(words), prog_name="steplaw", standalone_mode=False)
    except SteplawError as error:
        return _say(str(error), error.exit_status)
    except click.ClickException as error:
        return _say(_one_line(error), 2)
    except (click.Abort, KeyboardInterrupt):
        return _say("interrupted", 130)
    return status if isinstance(status, int) else 0


def _one_line(error: click.ClickException) -> str:
    text = " ".join(error.format_message().split())
    text = text[:1].lower() + text[1:].rstrip(".")
    context = getattr(error, "ctx", None)
    if context is not None and "type " not in text:
        text += f"; see {context.command_path} --help"
    return text


def _say(text: str, status: int) -> int:
    print(f"steplaw: {text}", file=sys.stderr)
    return status
