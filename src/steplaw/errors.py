"""Faults that a person can mend, each said in one line."""

from __future__ import annotations


class SteplawError(Exception):
    """A fault with one clear line for the person at the keyboard.

    Parameters
    ----------
    message : str
        What is wrong and where.
    hint : str, optional
        What to type instead.
    """

    exit_status = 2

    def __init__(self, message: str, hint: str | None = None) -> None:
        super().__init__(message)
        self.message = message
        self.hint = hint

    def __str__(self) -> str:
        return f"{self.message}; {self.hint}" if self.hint else self.message


class CallError(SteplawError):
    """The call was wrong: a subject, a feed or a size that cannot be used (exit status 2)."""

    exit_status = 2


class SubjectError(SteplawError):
    """The subject failed or ran past a limit (exit status 3)."""

    exit_status = 3
