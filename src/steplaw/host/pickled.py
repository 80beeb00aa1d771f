"""Inputs made by a feed that no other process can import: sent from the parent, pickled."""

from __future__ import annotations

import base64
import io
import pickle
import random
from collections.abc import Mapping
from typing import Any

from steplaw.errors import CallError
from steplaw.expression import Args
from steplaw.feed import Feed, FeedSpec, bind, size_text
from steplaw.subject import Subject
from steplaw.wording import describe

Size = Mapping[str, int]


class PickledFeed:
    """The parent's side: makes inputs with a Python function of this process.

    Parameters
    ----------
    spec : FeedSpec
        Of kind ``python``.
    names : sequence of str
        The size names.

    Raises
    ------
    CallError
        If the function cannot be called with the sizes and ``rng``.
    """

    def __init__(self, spec: FeedSpec, names: tuple[str, ...]) -> None:
        self.text = spec.text
        try:
            self._feed = bind(spec, None, names)  # type: ignore[arg-type]
        except (TypeError, ValueError) as error:
            raise CallError(
                f"the feed {spec.text} cannot be called by its parameters: {describe(error)}",
                "as in feed=lambda n, rng: [rng.random() for _ in range(n)]",
            ) from None

    def make(self, at: Size, draw: int) -> tuple[str, bool]:
        """Make an input and pickle it.

        Parameters
        ----------
        at : mapping of str to int
            The size.
        draw : int
            The draw.

        Returns
        -------
        text : str
            The arguments, as text for a request.
        random : bool
            Whether chance had a part in them.

        Raises
        ------
        CallError
            If the feed raises, or its value cannot be pickled.
        """
        state = random.getstate()
        try:
            made = self._feed.make(at, draw)
            drew = made.random
        finally:
            random.setstate(state)
        try:
            data = pickle.dumps((made.args, made.kwargs), protocol=pickle.HIGHEST_PROTOCOL)
        except Exception as error:
            raise CallError(
                f"the input that the feed {self.text} gives at {size_text(at)} cannot be sent to "
                f"the process that runs the subject: {describe(error)}",
                "write the feed as a function at the top of a .py file, or as an expression",
            ) from None
        return base64.b64encode(data).decode("ascii"), drew


def unpickling(subject: Subject, text: str, name: str, drawn: bool = False) -> Feed:
    """Give the host's side: a feed whose every input is the one that was sent, made afresh.

    Parameters
    ----------
    subject : Subject
        Whose parameters the input is held against.
    text : str
        What `PickledFeed.make` gave.
    name : str
        What the feed is called.
    drawn : bool
        Whether chance had a part in the input.
    """
    data = base64.b64decode(text)

    def build(at: Size, rng: random.Random) -> Args:
        args, kwargs = _Unpickler(io.BytesIO(data), subject).load()
        if drawn:
            rng.random()
        return Args(args, kwargs)

    return Feed("python", name, build, subject)


class _Unpickler(pickle.Unpickler):
    """Finds what the caller's main script defines in the subject's module, if that is the same."""

    def __init__(self, file: io.BytesIO, subject: Subject) -> None:
        super().__init__(file)
        self._module = subject.module

    def find_class(self, module: str, name: str) -> Any:
        if module == "__main__" and hasattr(self._module, name.partition(".")[0]):
            module = self._module.__name__
        return super().find_class(module, name)
