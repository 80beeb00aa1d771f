"""Random nests of loops as source text: affine bounds, strides, offsets, triangles, reversals."""

from __future__ import annotations

import random


class Nests:
    """Writes functions of one size.

    Parameters
    ----------
    seed : int
        Of the generator.
    deepest : int
        Loops inside each other, at most.
    """

    def __init__(self, seed: int, deepest: int = 4) -> None:
        self.rng = random.Random(seed)
        self.deepest = deepest

    def source(self) -> str:
        """Give the source of a function ``subject(n)``."""
        lines = ["def subject(n):", "    seen = 0"]
        self._loops(lines, 1, ["n"], self.rng.randint(1, self.deepest))
        return "\n".join([*lines, "    return seen", ""])

    def _loops(self, lines: list[str], depth: int, around: list[str], left: int) -> None:
        indent = "    " * depth
        name = "ijkl"[depth - 1]
        shape = self.rng.random()
        if shape < 0.85:
            self._for(lines, indent, name, around)
            inner = [*around, name]
        else:
            self._while(lines, indent, name, around)
            inner = [*around, name]
        if self.rng.random() < 0.3:
            lines.append(f"{indent}    seen += {name}")
        if left > 1:
            self._loops(lines, depth + 1, inner, left - 1)
            if self.rng.random() < 0.3:
                lines.append(f"{indent}    seen ^= 1")
        else:
            lines.append(f"{indent}    seen += 1")
            if self.rng.random() < 0.25:
                lines += [
                    f"{indent}    if {name} {self.rng.choice(['<', '>=', '=='])} "
                    f"{self._affine(around)}:",
                    f"{indent}        seen += 2",
                ]
        if shape >= 0.85:
            lines.append(f"{indent}    {name} += {self.step}")
        elif self.rng.random() < 0.1:
            lines += [f"{indent}else:", f"{indent}    seen += 3"]

    def _for(self, lines: list[str], indent: str, name: str, around: list[str]) -> None:
        step = self.rng.choice([1, 1, 1, 1, 2, 3])
        low = self._affine(around) if self.rng.random() < 0.6 else "0"
        high = self._bound(around)
        form = self.rng.random()
        if form < 0.3 and low == "0" and step == 1:
            made = f"range({high})"
        elif form < 0.6 and step == 1:
            made = f"range({low}, {high})"
        elif form < 0.8:
            made = f"range({low}, {high}, {step})"
        else:
            made = f"range({high}, {low}, -{step})"
        if self.rng.random() < 0.15:
            made = f"reversed({made})"
        if self.rng.random() < 0.1:
            lines.append(f"{indent}for _, {name} in enumerate({made}):")
        elif self.rng.random() < 0.1:
            lines.append(f"{indent}for {name} in list({made}):")
        else:
            lines.append(f"{indent}for {name} in {made}:")

    def _while(self, lines: list[str], indent: str, name: str, around: list[str]) -> None:
        self.step = self.rng.choice([1, 1, 2, 3])
        lines.append(f"{indent}{name} = {self._affine(around)}")
        lines.append(f"{indent}while {name} < {self._bound(around)}:")

    step = 1

    def _bound(self, around: list[str]) -> str:
        text = self._affine(around)
        if self.rng.random() < 0.6 and "n" not in text:
            text = f"n + {text}" if not text.startswith("-") else f"n - {text[1:]}"
        return text

    def _affine(self, around: list[str]) -> str:
        parts = []
        for name in self.rng.sample(around, min(len(around), self.rng.randint(0, 2))):
            factor = self.rng.choice([1, 1, 1, 1, -1, 2])
            parts.append({1: name, -1: f"-{name}"}.get(factor, f"{factor} * {name}"))
        offset = self.rng.randint(-3, 4)
        if offset or not parts:
            parts.append(str(offset))
        return " + ".join(parts).replace("+ -", "- ")
