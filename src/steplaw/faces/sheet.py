"""The parts that sheets in the terminal are laid out from."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING

from steplaw.faces.text import clean

if TYPE_CHECKING:
    from rich.console import Console, RenderableType
    from rich.table import Table

HEAD = "bold"
ACCENT = "bold cyan"
QUIET = "dim"
GOOD, BAD, UNSURE = "bold green", "bold red", "bold yellow"


class Sheet:
    """Lays out the parts of a sheet on a console.

    Parameters
    ----------
    console : rich.console.Console
        Where to.
    """

    def __init__(self, console: Console) -> None:
        self.console = console
        self.unicode = console.encoding.lower().replace("-", "").startswith("utf")
        self.width = min(console.width, 118)
        self.number = 0

    def clean(self, value: object) -> str:
        """Make untrusted text harmless and fit for the console's encoding."""
        return clean(value, self.unicode)

    def say(self, value: str, style: str = "", indent: int = 4) -> None:
        """Print one paragraph, wrapped inside the sheet."""
        from rich.padding import Padding
        from rich.text import Text

        self.emit(Padding(Text(self.clean(value), style=style), (0, 0, 0, indent), expand=False))

    def title(self, name: str, rows: Sequence[tuple[str, str]]) -> None:
        """Print the title block; short entries share a line."""
        from rich import box
        from rich.table import Table
        from rich.text import Text

        frame = Table(
            box=box.SQUARE if self.unicode else box.ASCII2,
            width=self.width,
            show_header=False,
            border_style=QUIET,
            padding=(0, 1),
        )
        frame.add_column(overflow="fold")
        short = [row for row in rows if row[0] in ("python", "digest", "steplaw")]
        head = Text(name, style=ACCENT)
        gap = self.width - 4 - len(name)
        head.append(self.clean(dict(rows)["subject"])[: gap - 2].rjust(gap), style=HEAD)
        frame.add_row(head)
        frame.add_section()
        block = Table(box=None, show_header=False, padding=(0, 1, 0, 0), expand=True)
        block.add_column(style=QUIET, no_wrap=True, width=7)
        block.add_column(overflow="fold", ratio=1)
        for label, value in rows:
            if label not in ("subject", "python", "digest", "steplaw"):
                block.add_row(label, Text(self.clean(value)))
        mark = Text()
        for place, (label, value) in enumerate(short):
            mark.append(f"{label} " if place else "", style=QUIET)
            mark.append(self.clean(value) + ("   " if place < len(short) - 1 else ""))
        block.add_row(short[0][0], mark)
        frame.add_row(block)
        self.emit(frame)

    def part(self, name: str, aside: str = "") -> None:
        """Print the heading of the next numbered part."""
        from rich.text import Text

        self.number += 1
        heading = Text()
        heading.append(f" {self.number} ", style=ACCENT)
        heading.append(f" {name} ", style=HEAD)
        aside = f" {self.clean(aside)}" if aside else ""
        rest = self.width - len(heading.plain) - len(aside)
        heading.append(("─" if self.unicode else "-") * max(rest, 0), style=QUIET)
        heading.append(aside, style=QUIET)
        self.console.print()
        heading.no_wrap = True
        heading.overflow = "crop"
        self.emit(heading)

    def pairs(self, rows: Sequence[tuple[str, str]]) -> None:
        """Print labelled texts."""
        from rich.text import Text

        table = self.table()
        table.add_column(style=QUIET, no_wrap=True, min_width=10)
        table.add_column(overflow="fold")
        for label, value in rows:
            table.add_row(label, Text(self.clean(value)))
        self.put(table)

    def table(self) -> Table:
        """Give an empty table in the sheet's own look."""
        from rich.table import Table

        return Table(box=None, show_header=False, padding=(0, 2, 0, 0), header_style=QUIET)

    def grid(self, columns: Sequence[tuple[str, str]], rows: Sequence[Sequence[str]]) -> None:
        """Print a table of texts; a column is a heading and ``left`` or ``right``."""
        from rich.text import Text

        table = self.table()
        table.show_header = True
        for place, (heading, side) in enumerate(columns):
            # What stands first gives way where the sheet is too narrow for all of it.
            least = max(len(heading), *(len(self.clean(row[place])) for row in rows), 1)
            table.add_column(
                heading,
                justify="right" if side == "right" else "left",
                min_width=min(least, 18) if place else None,
                no_wrap=True,
                overflow="ellipsis" if self.unicode else "crop",
            )
        for row in rows:
            table.add_row(*(Text(self.clean(cell)) for cell in row))
        self.put(table)

    def put(self, table: Table) -> None:
        """Print a table, indented and inside the sheet."""
        from rich.padding import Padding

        self.emit(Padding(table, (0, 0, 0, 4), expand=False))

    def emit(self, shown: RenderableType) -> None:
        """Print inside the sheet, without blanks at the ends of lines."""
        from rich.segment import Segment, Segments

        options = self.console.options.update(width=self.width, highlight=False)
        for line in self.console.render_lines(shown, options, pad=False):
            # Blanks that must not break a line have done their work once it is laid out.
            segments = [Segment(s.text.replace("\u00a0", " "), s.style) for s in line]
            while segments and not segments[-1].text.rstrip():
                segments.pop()
            if segments:
                last = segments[-1]
                segments[-1] = Segment(last.text.rstrip(), last.style)
            self.console.print(Segments([*segments, Segment.line()]), end="")

    def bar(self, share: float, cells: int = 8) -> str:
        """Draw a share as a bar."""
        full = round(share * cells)
        return ("█" if self.unicode else "#") * full + ("·" if self.unicode else ".") * (
            cells - full
        )
