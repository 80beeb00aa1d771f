"""Records: JSON in and out, attributes, schema."""

from __future__ import annotations

import copy
import json
import pickle
from html import unescape
from pathlib import Path
from typing import Any

import pytest
from jsonschema import Draft202012Validator

from faces import sample_records
from steplaw.errors import CallError
from steplaw.record import AuditRecord, TallyRecord, read, schema


@pytest.mark.parametrize("name", sorted(sample_records.ALL))
def test_sample_records_follow_the_schema(name: str) -> None:
    AuditRecord(sample_records.fresh(name)).validate()


def test_the_tally_follows_its_schema() -> None:
    TallyRecord(sample_records.tally()).validate()


@pytest.mark.parametrize("name", ["audit-1.schema.json", "tally-1.schema.json"])
def test_schemas_are_valid_json_schemas(name: str) -> None:
    # JSON Schema draft 2020-12, by its own meta-schema as the jsonschema library ships it.
    Draft202012Validator.check_schema(schema(name))
    assert schema(name)["$schema"] == "https://json-schema.org/draft/2020-12/schema"


def test_attributes_and_keys_are_one() -> None:
    record = AuditRecord(sample_records.cubic())
    assert record.figure.law.formula == record["figure"]["law"]["formula"]
    assert record.lines[4].dominant is True
    assert record["figure"]["values"][3].at.n == 3
    assert "figure" in dir(record)
    with pytest.raises(AttributeError, match="nowhere"):
        _ = record.figure.nowhere


def test_json_is_deterministic_keeps_the_order_and_comes_back() -> None:
    data = sample_records.cubic()
    text = AuditRecord(data).to_json()
    assert text == AuditRecord(copy.deepcopy(data)).to_json()
    assert json.loads(text) == data
    assert list(json.loads(text)) == list(data)
    again = AuditRecord.from_json(text)
    assert again == AuditRecord(data) and again.to_json() == text
    assert again.figure.law.grade == "exact"
    assert "\n" not in AuditRecord(data).to_json(indent=None).strip()


def test_a_record_can_be_copied_and_pickled() -> None:
    record = AuditRecord(sample_records.cubic())
    for other in (copy.deepcopy(record), pickle.loads(pickle.dumps(record))):
        assert other == record and isinstance(other, AuditRecord)
        assert other.figure.law.grade == "exact"
    other = copy.deepcopy(record)
    other["figure"]["law"]["grade"] = "open"
    assert record.figure.law.grade == "exact"


def test_a_record_is_written_and_read(tmp_path: Path) -> None:
    record = AuditRecord(sample_records.cubic())
    found = read(record.write(tmp_path / "trios.json"))
    assert found == record and isinstance(found, AuditRecord)
    tally = TallyRecord(sample_records.tally())
    assert isinstance(read(tally.write(tmp_path / "tally.json")), TallyRecord)


def broken(change: Any) -> AuditRecord:
    data = sample_records.cubic()
    change(data)
    return AuditRecord(data)


@pytest.mark.parametrize(
    ("change", "place"),
    [
        (lambda d: d.pop("figure"), "figure"),
        (lambda d: d["figure"]["law"].update(grade="sure"), "figure/law/grade"),
        (lambda d: d["figure"]["law"].update(formula=None), "figure/law/formula"),
        (lambda d: d["figure"]["law"].update(grade="open"), "figure/law/"),
        (lambda d: d["figure"]["law"].pop("settled_by"), "settled_by"),
        (lambda d: d["figure"]["law"].update(certainty=1), "certainty"),
        (lambda d: d["figure"]["values"][0].update(mean=3.5), "figure/values/0/mean"),
        (lambda d: d["figure"]["values"][0].update(mean="3.5"), "figure/values/0/mean"),
        (lambda d: d["figure"]["values"][0].update(mean="7/0"), "figure/values/0/mean"),
        (lambda d: d["figure"]["values"][0].update(at={"n": -1}), "figure/values/0/at/n"),
        (lambda d: d["tallies"][0].update(steps=True), "tallies/0/steps"),
        (lambda d: d["lines"][0].update(share=1.2), "lines/0/share"),
        (lambda d: d["clock"].update(agrees="yes"), "clock/agrees"),
        (lambda d: d["clock"].update(ns_per_step_interval=[1]), "clock/ns_per_step_interval"),
        (lambda d: d.update(stopped={"kind": "bored"}), "stopped"),
        (lambda d: d.update(schema="steplaw.audit/2"), "schema"),
        (lambda d: d.update(made_at="noon"), "made_at"),
    ],
)
def test_a_fault_is_named_with_its_place(change: Any, place: str) -> None:
    with pytest.raises(CallError) as caught:
        broken(change).validate("trios.json")
    line = str(caught.value)
    assert line.startswith("trios.json does not follow steplaw.audit/1") and place in line
    assert "\n" not in line and len(line) < 400


@pytest.mark.parametrize(
    "text",
    ["", "{", "[1]", "NaN", '{"schema": "other/1"}', '{"schema": 5}', "[" * 100_000, '{"a": NaN}'],
)
def test_what_is_no_record_gives_one_line(text: str, tmp_path: Path) -> None:
    path = tmp_path / "bad.json"
    path.write_text(text)
    with pytest.raises(CallError) as caught:
        read(path)
    assert "bad.json" in str(caught.value) and "\n" not in str(caught.value)
    with pytest.raises(CallError):
        AuditRecord.from_json(text)


def test_bytes_that_are_no_text_give_one_line(tmp_path: Path) -> None:
    path = tmp_path / "bad.json"
    path.write_bytes(b"\xff\xfe\x00\xd8{")
    with pytest.raises(CallError, match=r"bad\.json"):
        read(path)


def test_no_such_file_and_no_such_folder_give_one_line(tmp_path: Path) -> None:
    with pytest.raises(CallError, match="cannot read"):
        read(tmp_path / "none.json")
    with pytest.raises(CallError, match="cannot write"):
        AuditRecord(sample_records.cubic()).write(tmp_path / "none" / "x.json")


def test_numbers_that_json_does_not_know_are_refused() -> None:
    data = sample_records.cubic()
    data["clock"]["seconds"][0] = float("nan")
    with pytest.raises(ValueError):
        AuditRecord(data).to_json()


def test_repr_tells_the_law_the_line_and_the_clock() -> None:
    shown = repr(AuditRecord(sample_records.cubic()))
    assert "trios_of_sailings at samples/ferry/planning.py:41" in shown
    assert "23*n**3/6 - 5*n**2/2 + 29*n/3 + 12 (exact)" in shown
    assert "line 47 has 93 %" in shown
    assert "clock: time follows the steps" in shown
    assert len(shown.splitlines()) <= 8


@pytest.mark.parametrize("name", sorted(sample_records.ALL))
def test_repr_shows_every_record_and_obeys_no_control_character(name: str) -> None:
    shown = repr(AuditRecord(sample_records.fresh(name)))
    assert shown and all(c.isprintable() for c in shown.replace("\n", ""))
    assert repr(AuditRecord({})) and repr(TallyRecord({}))


def test_a_notebook_gets_the_page_of_the_record() -> None:
    frame = AuditRecord(sample_records.cubic())._repr_html_()
    assert frame.startswith("<iframe ")
    html = unescape(unescape(frame))
    assert "<main" in html and "trios_of_sailings" in html and "23/6 n³" in html
