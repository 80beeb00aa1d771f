"""The pytest plugin: the fixture ``law_of``, which audits a function inside a test."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import TYPE_CHECKING, Any

import pytest

if TYPE_CHECKING:
    from steplaw.review.assertions import FoundLaw

LawOf = Callable[..., "FoundLaw"]


@pytest.fixture
def law_of(request: pytest.FixtureRequest) -> LawOf:
    """Audit a function or a study, and give its law to assert on.

    Returns
    -------
    callable
        Takes a function, its name, or the name of a study of the project, and the settings of
        `steplaw.audit`; gives a `steplaw.review.assertions.FoundLaw`. A function is audited for
        its ``work``, steps and native visits together, unless ``figure`` says otherwise. The
        clock is left out, and the runs are made one after the other.
    """
    project = Path(request.config.rootpath)

    def audited(subject: str | Callable[..., Any], **settings: Any) -> FoundLaw:
        __tracebackhide__ = True
        return _audited(subject, project, settings)

    return audited


def _audited(
    subject: str | Callable[..., Any], project: Path, settings: dict[str, Any]
) -> FoundLaw:
    __tracebackhide__ = True
    from steplaw.errors import SteplawError
    from steplaw.job import audit
    from steplaw.review.assertions import FoundLaw
    from steplaw.review.configuration import read
    from steplaw.review.outcomes import faults_of

    settings = {"clock": False, "processes": 1, **settings}
    study = subject if isinstance(subject, str) and ":" not in subject else None
    try:
        if study is not None:
            record = read(project).study(study).audit(**settings)
        else:
            record = audit(subject, **{"figure": "work", **settings})
    except SteplawError as fault:
        pytest.fail(f"steplaw: {fault}", pytrace=False)
    faults, status = faults_of(record, study or str(record["subject"]["name"]))
    if status:
        pytest.fail("steplaw: " + "; ".join(faults), pytrace=False)
    return FoundLaw(record, study=study, project=project)
