"""Records made by hand for the faces, true to the shape that an audit builds."""

from __future__ import annotations

import copy
from fractions import Fraction
from typing import Any

from steplaw.clock import Timing, check

SIZES = [0, 1, 2, 3, 4, 5, 6, 7, 8, 16, 32, 64]
SOURCE = {
    41: "def trios_of_sailings(sailings):",
    43: "    found = 0",
    44: "    for i in range(len(sailings)):",
    45: "        for j in range(i + 1, len(sailings)):",
    46: "            for k in range(j + 1, len(sailings)):",
    47: "                if apart(sailings[i], sailings[j], sailings[k]):",
    48: "                    found += 1",
    49: "    return found",
}


def law(formula: str | None, leading: str | None = None, grade: str = "exact", **more: Any) -> Any:
    out = {
        "formula": formula,
        "leading": leading or formula,
        "grade": grade,
        "holds_from": 0,
        "settled_by": [0, 1, 2, 3, 4],
        "checked_at": [5, 6, 7, 8, 16, 32, 64],
        "error": 0.0,
        "note": "",
    }
    if grade == "open":
        out |= {"formula": None, "leading": None, "holds_from": None, "error": None}
    return out | more


def steps_of(n: int) -> int:
    return round(Fraction(23, 6) * n**3 - Fraction(5, 2) * n**2 + Fraction(29, 3) * n) + 12


def lines() -> list[dict[str, Any]]:
    cube = "n*(n - 1)*(n - 2)/6"
    rows = [
        (43, law("1"), law("2"), 0.00001, False),
        (44, law("n + 1"), law("6*n + 6"), 0.0003, False),
        (45, law("n*(n - 1)/2 + n"), law("3*n**2 + 5*n"), 0.012, False),
        (46, law("n**3/6 + n/6"), law("n**3/3 + 2*n/3"), 0.058, False),
        (47, law(cube), law("7*n**3/2 - 21*n**2/2 + 7*n"), 0.93, True),
        (
            48,
            law(None, grade="open", note="depends on the sailings"),
            law(None, grade="open"),
            0,
            False,
        ),
        (49, law("1"), law("2"), 0.00001, False),
    ]
    return [
        {
            "file": "samples/ferry/planning.py",
            "line": number,
            "source": SOURCE[number],
            "function": "trios_of_sailings",
            "frequency": frequency,
            "steps": steps,
            "share": share,
            "dominant": heavy,
        }
        for number, frequency, steps, share, heavy in rows
    ]


def clock(per_step: Any = lambda n: 21.0, sizes: list[int] | None = None) -> dict[str, Any]:
    timed = sizes or [8, 16, 32, 64, 128]
    timings = []
    for place, n in enumerate(timed):
        base = 120 + per_step(n) * steps_of(n)
        samples = tuple(round(base * (1 + 0.004 * ((3 * place + r) % 5)), 2) for r in range(7))
        timings.append(Timing({"n": n}, min(samples), samples))
    out = check([{"n": n} for n in timed], [steps_of(n) for n in timed], timings)
    return out | {"machine": "Linux-6.1-x86_64, CPython 3.11.7"}


def cubic() -> dict[str, Any]:
    formula = "23*n**3/6 - 5*n**2/2 + 29*n/3 + 12"
    whole = law(formula, "23*n**3/6")
    return {
        "schema": "steplaw.audit/1",
        "steplaw": "0.1.0",
        "subject": {
            "name": "trios_of_sailings",
            "file": "samples/ferry/planning.py",
            "line": 41,
            "digest": "sha256:1f3a9c2b77d0e41c9a",
            "doc": "Count the trios of sailings that one vessel could serve.",
        },
        "python": "3.11.7",
        "sizes": {
            "names": ["n"],
            "plan": [{"n": n} for n in SIZES],
            "settled_by": [0, 1, 2, 3, 4],
            "held_out": [5, 6, 7, 8, 16, 32, 64],
        },
        "feed": {
            "kind": "expression",
            "text": "[(9 * k, 9 * k + 8) for k in range(n)]",
            "varies": False,
            "draws": 3,
        },
        "figure": {
            "name": "steps",
            "law": whole,
            "least": None,
            "most": None,
            "variance": None,
            "values": [
                {
                    "at": {"n": n},
                    "draws": 1,
                    "mean": steps_of(n),
                    "variance": 0,
                    "least": steps_of(n),
                    "most": steps_of(n),
                }
                for n in SIZES
            ],
        },
        "tallies": [
            {
                "at": {"n": n},
                "draw": 0,
                "steps": steps_of(n),
                "operations": {
                    "element_read": steps_of(n) // 3,
                    "comparison": steps_of(n) // 5,
                    "call": steps_of(n) // 9,
                    "iteration": steps_of(n) // 10,
                    "arithmetic": 0,
                },
                "native": None,
                "own_steps": steps_of(n) // 2,
            }
            for n in SIZES
        ],
        "laws": {
            "steps": law(formula, "23*n**3/6"),
            "native": None,
            "operations": {
                "comparison": law("n**3/6 - n**2/2 + n/3", "n**3/6"),
                "element_read": law("n**3/2 - 3*n**2/2 + n", "n**3/2"),
            },
            "parts": {"exact": None, "data": None},
        },
        "lines": lines(),
        "functions": [
            {
                "file": "samples/ferry/planning.py",
                "name": "trios_of_sailings",
                "line": 41,
                "own": True,
                "calls": law("1"),
                "steps": law("2*n**3 - n**2 + 12", "2*n**3"),
                "share": 0.52,
            },
            {
                "file": "samples/ferry/times.py",
                "name": "apart",
                "line": 7,
                "own": False,
                "calls": law("n*(n - 1)*(n - 2)/6", "n**3/6"),
                "steps": law("11*n**3/6 - 3*n**2/2 + 29*n/3", "11*n**3/6"),
                "share": 0.48,
            },
        ],
        "clock": clock(),
        "repeatable": {"holds": True, "checked_at": [{"n": 8}], "lines": []},
        "stopped": None,
        "notes": [
            "Auditing runs the subject's code.",
            "A law holds for the inputs it was found on.",
            "A forecast beyond the sizes run extrapolates.",
            "None of this is a worst-case execution time for a safety-related deadline; that "
            "belongs to the qualified process that the applicable standard asks for.",
        ],
        "run_again": "steplaw audit samples/ferry/planning.py:trios_of_sailings "
        "--feed '[(9 * k, 9 * k + 8) for k in range(n)]'",
    }


def departing() -> dict[str, Any]:
    """A list scan: the clock sees what the steps leave out."""
    record = cubic()
    record["subject"]["name"] = "without_repeats"
    sizes = [8, 16, 32, 64, 128, 256, 512]
    record["clock"] = clock(lambda n: 21.0 * (1 + n / 40), sizes)
    return record


def random_draws() -> dict[str, Any]:
    """Mean steps over draws: a fitted law, with its exact and its data-dependent part."""
    record = cubic()
    record["feed"] = {
        "kind": "expression",
        "text": "[(rng.randrange(1440), 20) for _ in range(n)]",
        "varies": True,
        "draws": 5,
    }
    main = law(
        "3.9127*n**3",
        "3.9127*n**3",
        "fitted",
        error=0.0213,
        holds_from=8,
        settled_by=[8, 16, 32],
        checked_at=[64],
        note="the draws differ",
    )
    record["figure"] |= {
        "law": main,
        "least": law("7*n**3/2 + 12", "7*n**3/2"),
        "most": law("23*n**3/6 - n + 12", "23*n**3/6"),
        "variance": law(None, grade="open"),
    }
    for value in record["figure"]["values"]:
        n = value["at"]["n"]
        low, high = steps_of(n) - n, steps_of(n) + 3 * n
        mean = Fraction(5 * steps_of(n) + 3 * n, 5)
        value |= {"draws": 5, "mean": exact(mean), "variance": exact(Fraction(n * n, 7))}
        value |= {"least": low, "most": high}
    record["laws"]["steps"] = main
    record["laws"]["parts"] = {
        "exact": law("7*n**3/2 - 5*n**2/2 + 12", "7*n**3/2"),
        "data": law("0.4127*n**3", grade="fitted", error=0.05),
    }
    return record


def exact(value: Fraction) -> int | str:
    return value.numerator if value.denominator == 1 else str(value)


def stopped() -> dict[str, Any]:
    """Raised half-way: open law, no clock."""
    record = cubic()
    record["figure"]["law"] = law(
        None, grade="open", settled_by=[], checked_at=[], note="two sizes"
    )
    record["figure"]["values"] = record["figure"]["values"][:2]
    record["laws"] |= {"steps": law(None, grade="open"), "operations": {}, "parts": None}
    record |= {"lines": [], "functions": [], "tallies": record["tallies"][:2], "clock": None}
    record["stopped"] = {
        "at": {"n": 2},
        "draw": 0,
        "kind": "raised",
        "message": "IndexError: list index out of range (planning.py:47)",
    }
    return record


def nothing_done() -> dict[str, Any]:
    """Stopped before the first size was through."""
    record = stopped()
    record["figure"]["values"] = []
    record["tallies"] = []
    record["sizes"] |= {"plan": [], "settled_by": [], "held_out": []}
    record["stopped"] |= {"at": None, "draw": None, "kind": "crash", "message": "the child ended"}
    return record


def unrepeatable() -> dict[str, Any]:
    record = cubic()
    record["repeatable"] = {
        "holds": False,
        "checked_at": [{"n": 8}],
        "lines": [{"file": "samples/ferry/planning.py", "line": 47, "counts": [56, 61]}],
    }
    record["figure"]["law"] = law(None, grade="open", note="the counts differ from run to run")
    record["notes"] = ["The counts differ from run to run: time, ids or a random source are read."]
    return record


def grid() -> dict[str, Any]:
    """Two size names."""
    record = cubic()
    plan = [{"n": n, "m": m} for n in (4, 8, 16) for m in (4, 8)]
    main = law(
        "3*n*m + 5*n + 4", "3*n*m", settled_by=[[4, 4], [4, 8], [8, 4]], checked_at=[[16, 8]]
    )
    record["sizes"] = {
        "names": ["n", "m"],
        "plan": plan,
        "settled_by": [[4, 4]],
        "held_out": [[16, 8]],
    }
    record["figure"] |= {"law": main}
    record["figure"]["values"] = [
        {"at": at, "draws": 1, "mean": 3 * at["n"] * at["m"], "variance": 0}
        | {"least": 3 * at["n"] * at["m"], "most": 3 * at["n"] * at["m"]}
        for at in plan
    ]
    record["laws"]["steps"] = main
    record["clock"] = None
    return record


def untimed() -> dict[str, Any]:
    """The timed run failed: a clock part with its reason alone."""
    record = cubic()
    record["clock"] = {"agrees": None, "reason": "the timed run failed: raised ValueError"}
    return record


HOSTILE = "\x1b]0;owned\x07\x1b[2J[bold red]x[/]<script>alert(1)</script>|`‮evil‬\r\nINJECTED"


def hostile() -> dict[str, Any]:
    """Untrusted text in every place that can hold some."""
    record = cubic()
    record["subject"] |= {"name": HOSTILE, "file": HOSTILE, "doc": HOSTILE, "digest": HOSTILE}
    record["feed"]["text"] = HOSTILE
    record["steplaw"] = HOSTILE
    record["run_again"] = HOSTILE
    record["notes"] = [HOSTILE]
    record["figure"]["name"] = HOSTILE
    record["figure"]["law"] |= {"note": HOSTILE, "leading": HOSTILE, "formula": HOSTILE}
    record["laws"]["operations"] = {HOSTILE: law(HOSTILE)}
    record["tallies"][-1]["operations"] = {HOSTILE: 3}
    for row in record["lines"]:
        row |= {"source": HOSTILE, "file": HOSTILE, "function": HOSTILE}
        row["frequency"] = law(HOSTILE)
    for row in record["functions"]:
        row |= {"name": HOSTILE, "file": HOSTILE}
    record["clock"] |= {"reason": HOSTILE, "machine": HOSTILE}
    record["stopped"] = {"at": {"n": 3}, "draw": 0, "kind": "raised", "message": HOSTILE}
    record["repeatable"] = {
        "holds": False,
        "checked_at": [],
        "lines": [{"file": HOSTILE, "line": 1, "counts": [1, 2]}],
    }
    return record


def every_text(record: Any, text: str) -> Any:
    """Put a text in each place of a record that holds a free one."""
    fixed = {"schema", "grade", "kind", "python", "mean", "formula", "leading", "names"}
    if isinstance(record, dict):
        return {k: v if k in fixed else every_text(v, text) for k, v in record.items()}
    if isinstance(record, list):
        return [every_text(v, text) for v in record]
    return text if isinstance(record, str) else record


PIECES = [
    "</script>",
    "</style>",
    "<!--",
    "<script>alert(1)//",
    "]]>",
    '"',
    "'",
    ">",
    "<b>",
    "&lt;",
]
PIECES += [
    "\u2028",
    "\x1b[2J",
    "\u202e",
    "{{ 7 * 7 }}",
    "{% raw %}",
    "<img src=x onerror=y>",
    "\x00",
]


def tally() -> dict[str, Any]:
    return {
        "schema": "steplaw.tally/1",
        "steplaw": "0.1.0",
        "python": "3.12.4",
        "program": "samples/ferry/day_plan.py --day 3",
        "exit_status": 0,
        "steps": 1_234_567,
        "functions": [
            {"file": "samples/ferry/times.py", "name": "apart", "line": 7, "calls": 56_000}
            | {"steps": 900_000},
            {"file": "samples/ferry/day_plan.py", "name": "<module>", "line": 1, "calls": 1}
            | {"steps": 334_567},
        ],
        "opcodes": {"LOAD_FAST": 700_000, "COMPARE_OP": 300_000, "FOR_ITER": 234_567},
        "operations": {"local_read": 700_000, "comparison": 300_000, "iteration": 234_567},
        "lines": [],
        "notes": [],
    }


ALL = {
    build.__name__: build
    for build in (
        cubic,
        departing,
        random_draws,
        stopped,
        nothing_done,
        unrepeatable,
        grid,
        untimed,
        hostile,
    )
}


def fresh(name: str) -> dict[str, Any]:
    return copy.deepcopy(ALL[name]())
