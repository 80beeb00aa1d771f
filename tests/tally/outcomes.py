"""Runs test modules and writes each test's outcome: ``outcomes.py FILE.json MODULE...``.

It is run as a program of its own, once plainly and once under probes.
"""

import json
import sys
import time
import unittest


class Outcomes(unittest.TestResult):
    def __init__(self):
        super().__init__()
        self.found = {}

    def note(self, test, outcome, why=""):
        self.found.setdefault(str(test), []).append([outcome, why])

    def addSuccess(self, test):
        self.note(test, "passed")

    def addError(self, test, err):
        super().addError(test, err)
        self.note(test, "error", self.errors[-1][1])

    def addFailure(self, test, err):
        super().addFailure(test, err)
        self.note(test, "failed", self.failures[-1][1])

    def addSkip(self, test, reason):
        self.note(test, "skipped")

    def addExpectedFailure(self, test, err):
        self.note(test, "failed as expected")

    def addUnexpectedSuccess(self, test):
        self.note(test, "passed against expectation")

    def addSubTest(self, test, subtest, err):
        if err is not None:
            kind = "failed" if issubclass(err[0], test.failureException) else "error"
            self.note(subtest, kind, self._exc_info_to_string(err, test))


def main(path, *modules):
    suite = unittest.defaultTestLoader.loadTestsFromNames(modules)
    result = Outcomes()
    begun = time.process_time()
    suite.run(result)
    seconds = time.process_time() - begun
    with open(path, "w", encoding="utf-8") as file:  # noqa: PTH123 - as little as can be imported
        json.dump({"outcomes": result.found, "seconds": seconds}, file)


if __name__ == "__main__":
    main(*sys.argv[1:])
