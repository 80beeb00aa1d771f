"""``steplaw tally``."""

from __future__ import annotations

import click

from steplaw.commands.output import deliver, must_be_writable


@click.command(
    "tally", context_settings={"ignore_unknown_options": True, "allow_interspersed_args": False}
)
@click.option("--json", "json_path", metavar="PATH|-", help="Write the record there.")
@click.option("-m", "module", metavar="MODULE", help="Run a module, as python -m does.")
@click.argument("words", nargs=-1, type=click.UNPROCESSED, metavar="(SCRIPT.py | -m MODULE) [ARGS]")
def command(json_path: str | None, module: str | None, words: tuple[str, ...]) -> int:
    """Run a program as it is and count every step of its Python code.

    Its output, arguments, exit status and exceptions are its own; the tally goes to standard
    error, or to a record.
    """
    if module is None and not words:
        raise click.UsageError("no program is named: type steplaw tally SCRIPT.py, or -m MODULE")
    must_be_writable(json_path)
    from steplaw.program import run_program

    target = module if module is not None else words[0]
    arguments = words if module is not None else words[1:]
    record, status = run_program(target, arguments, module=module is not None)
    deliver(record, json_path, error=True)
    return status if status >= 0 else 128 - status
