"""The option that says whose configuration is read."""

from __future__ import annotations

import click

PROJECT = click.option(
    "--project",
    default=".",
    metavar="FOLDER",
    help="Read the configuration that is nearest in this folder or above it.",
)
