"""Every code object under probes in this process, each rewritten once."""

from __future__ import annotations

from types import CodeType

from steplaw.tally.placement import Unplaceable
from steplaw.tally.rewrite import Probed

_Key = tuple[str, str, CodeType]


class Registry:
    """Code objects and their probed forms.

    Parameters
    ----------
    watched : bool
        Whether operands are looked at as well, for the native ledger.

    Attributes
    ----------
    probed : list of Probed
        In the order of rewriting.
    refused : dict of CodeType to str
        Code objects left as they are, with the reason.
    """

    def __init__(self, watched: bool = False) -> None:
        self.watched = watched
        self.probed: list[Probed] = []
        self.refused: dict[CodeType, str] = {}
        self._by_original: dict[_Key, CodeType] = {}
        self._by_code: dict[int, Probed] = {}

    def rewrite(self, code: CodeType) -> CodeType:
        """Give the probed form of a code object, its nested code objects included.

        Parameters
        ----------
        code : CodeType
            An original, or one that is probed already.

        Returns
        -------
        CodeType
            The same object each time for equal originals of one file and name.
        """
        if id(code) in self._by_code:
            return code
        key = (code.co_filename, code.co_qualname, code)
        known = self._by_original.get(key)
        if known is not None:
            return known
        consts = tuple([self.rewrite(c) if isinstance(c, CodeType) else c for c in code.co_consts])
        try:
            probed = Probed(code, consts, self.watched)
        except Unplaceable as reason:
            self.refused[code] = str(reason)
            self._by_original[key] = code
            return code
        self.probed.append(probed)
        self._by_original[key] = probed.code
        self._by_code[id(probed.code)] = probed
        return probed.code

    def find(self, code: CodeType) -> Probed | None:
        """Give the probed form that a running code object is, None for an original."""
        return self._by_code.get(id(code))

    def original(self, code: CodeType) -> CodeType:
        """Give the original of a probed code object, or the code object itself."""
        probed = self._by_code.get(id(code))
        return code if probed is None else probed.original
