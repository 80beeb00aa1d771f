"""How often the clock check is right on made-up timings whose truth is known.

    PYTHONPATH=tests:src python tests/bench/clock_power.py

Each cell judges 1,000 sets of timings with normal noise, in hundredths, from a fixed seed. Wanted
are at most 5 false alarms and at most 5 missed terms in 100.
"""

from __future__ import annotations

import random
from collections.abc import Callable

import test_clock

TRIALS = 1000
PLANS = {"8 to 4096, ten sizes": test_clock.DOUBLING, "8 to 128, five": test_clock.SHORT_PLAN}


def _power(power: int) -> Callable[[int], int]:
    return lambda n: 7 * n**power + 20


def _cases(top: int) -> dict[str, tuple[Callable[[int], int], Callable[[int], float]]]:
    cases: dict[str, tuple[Callable[[int], int], Callable[[int], float]]] = {}
    for power in (1, 2, 3):
        steps = _power(power)
        cases[f"none, n^{power}"] = steps, lambda n, steps=steps: 100 + 25 * steps(n)
    for times in (1.5, 2, 3, 6):
        cases[f"times {times} by a term of one order more"] = (
            test_clock.steps_linear,
            lambda n, times=times: (
                100 + 25 * test_clock.steps_linear(n) * (1 + (times - 1) * n / top)
            ),
        )
    if top > 1000:
        cases["from n = 512 on as n^1.6"] = (
            test_clock.steps_linear,
            lambda n: 25 * test_clock.steps_linear(n) * max(1.0, n / 512) ** 0.6,
        )
    return cases


def main() -> None:
    """Print the table."""
    print("| sizes | departure | noise | samples | agrees | departs | undecided |")
    print("| --- | --- | ---: | ---: | ---: | ---: | ---: |")
    for plan, sizes in PLANS.items():
        for case, (steps, cost) in _cases(sizes[-1]).items():
            for noise in (5, 10):
                for rounds in (3, 7):
                    rng = random.Random(20261201)
                    found = [
                        test_clock.made_up(rng, sizes, steps, cost, noise / 100, rounds)
                        for _ in range(TRIALS)
                    ]
                    shares = (
                        f"{100 * test_clock.share(found, x):.1f}" for x in (True, False, None)
                    )
                    print(f"| {plan} | {case} | {noise} | {rounds} | {' | '.join(shares)} |")


if __name__ == "__main__":
    main()
