"""Judging a history anew: every kind of difference is found and said; what is the same is not."""

from collections.abc import Callable
from dataclasses import replace
from pathlib import Path

import pytest

from airfield_board.history.records import Json, Record, RecordKind, StoredRecord
from airfield_board.history.store import History
from airfield_board.session.rejudge import judge_anew
from airfield_board.session.verifying import verify_history
from tests.session.fields import FLEET, Field, make_field

COOL_C, HOT_C = 15.0, 28.0


@pytest.fixture
def field(tmp_path: Path) -> Field:
    return make_field(tmp_path)


@pytest.fixture
def records(field: Field) -> list[StoredRecord]:
    """Of a recorder that saw a hold begin and end, a change of settings and no data."""
    temperatures_c = (20.0, 24.0, HOT_C, 24.0, 22.0, 22.5)
    field.write(field.row(0, temperatures_c[0]))
    recorder = field.open()
    recorder.poll()
    for place, temperature_c in enumerate(temperatures_c[1:], start=1):
        field.append(field.row(5 * place, temperature_c))
        field.move_to(5 * place)
        recorder.poll()
    field.fleet.write_text(FLEET.replace("6350", "6000"), encoding="utf-8")
    recorder.poll()
    field.move_to(50)
    recorder.poll()
    recorder.close()
    return _read(field)


def _read(field: Field) -> list[StoredRecord]:
    history = History.open_read_only(field.history)
    found = list(history.records())
    history.close()
    return found


def _of(kind: RecordKind, /, **wanted: Json) -> Callable[[StoredRecord], bool]:
    return lambda record: record.kind is kind and all(record.body.get(key) == value for key, value in wanted.items())


def _without(records: list[StoredRecord], chosen: Callable[[StoredRecord], bool]) -> list[StoredRecord]:
    first = next(record for record in records if chosen(record))
    return [record for record in records if record is not first]


def _with(records: list[StoredRecord], chosen: Callable[[StoredRecord], bool], **body: Json) -> list[StoredRecord]:
    first = next(record for record in records if chosen(record))
    changed = replace(first, body={**first.body, **body})
    return [changed if record is first else record for record in records]


def _differences(records: list[StoredRecord]) -> list[str]:
    return [difference.text for difference in judge_anew(records).differences]


def test_a_whole_history_has_none(records: list[StoredRecord]) -> None:
    anew = judge_anew(records)
    assert anew.differences == ()
    assert anew.observations == 6
    assert anew.settings is not None
    assert anew.settings.in_force[1].text == FLEET.replace("6350", "6000")


def test_progress_is_told_in_thousands(records: list[StoredRecord]) -> None:
    told: list[int] = []
    judge_anew([replace(record, seq=record.seq * 5_000) for record in records], told.append)
    assert told == [record.seq * 5_000 for record in records]


def test_another_verdict(records: list[StoredRecord]) -> None:
    changed = _with(records, _of(RecordKind.OBSERVATION), verdict="suspect")
    assert "the observation was suspect, judged anew it is valid" in _differences(changed)


def test_another_value_read(records: list[StoredRecord]) -> None:
    values: Json = {"altimeter_hpa": 1013.25, "temperature_c": COOL_C}
    hot = next(record for record in records if _of(RecordKind.CHANGE, scope="limit", to="hold")(record))
    changed = _with(records, _of(RecordKind.OBSERVATION, time=hot.body["time"]), values=values)
    texts = _differences(changed)
    assert any("to hold" in text for text in texts), texts


def test_another_value_of_a_change(records: list[StoredRecord]) -> None:
    changed = _with(records, _of(RecordKind.CHANGE, scope="limit", to="hold"), value=6350.0)
    (text,) = _differences(changed)
    assert text.startswith("recorded is trainer Departure (density altitude) from near to hold at ")


def test_the_last_digit_of_another_machine_is_none(records: list[StoredRecord]) -> None:
    hold = next(record for record in records if _of(RecordKind.CHANGE, scope="limit", to="hold")(record))
    value = hold.body["value"]
    assert isinstance(value, float)
    assert _differences(_with(records, lambda record: record is hold, value=value * (1 + 1e-14))) == []
    assert _differences(_with(records, lambda record: record is hold, value=value + 0.01)) != []


def test_a_missing_change(records: list[StoredRecord]) -> None:
    for state in ("hold", "no_data"):
        without = _without(records, _of(RecordKind.CHANGE, scope="limit", to=state))
        assert _differences(without) != [], state


def test_an_added_change(records: list[StoredRecord]) -> None:
    hold = next(record for record in records if _of(RecordKind.CHANGE, scope="limit", to="hold")(record))
    place = records.index(hold)
    first_cool = next(at for at, record in enumerate(records) if record.kind is RecordKind.OBSERVATION)
    added = [*records[:first_cool], hold, *records[first_cool:]]
    assert any("a change that does not come about anew" in text for text in _differences(added))
    assert place > first_cool


def test_an_added_change_of_a_time_that_cannot_be_read(records: list[StoredRecord]) -> None:
    hold = next(record for record in records if _of(RecordKind.CHANGE, scope="limit", to="hold")(record))
    odd = replace(hold, body={**hold.body, "time": "noon"})
    assert any(text.endswith("at ?") for text in _differences([*records[:-1], odd, records[-1]]))


def test_a_missing_episode(records: list[StoredRecord]) -> None:
    assert "an episode is missing" in _differences(_without(records, _of(RecordKind.EPISODE)))


def test_another_episode_and_an_added_one(records: list[StoredRecord]) -> None:
    assert _differences(_with(records, _of(RecordKind.EPISODE), minutes=1.0)) == [
        "an episode that is another when judged anew"
    ]
    episode = next(record for record in records if record.kind is RecordKind.EPISODE)
    assert _differences([*records, episode]) == ["an episode that does not come about anew"]


def test_missing_settings(records: list[StoredRecord]) -> None:
    without = [record for record in records if record.kind is not RecordKind.CONFIGURATION]
    found = judge_anew(without)
    assert found.judge is None
    assert "an observation stands before any settings" in [difference.text for difference in found.differences]


def test_a_fleet_without_a_profile_is_no_setting(records: list[StoredRecord]) -> None:
    fleet = next(record for record in records if _of(RecordKind.CONFIGURATION, kind="fleet")(record))
    assert judge_anew([fleet]).settings is None


def test_an_acceptance_without_settings_accepts_nothing(records: list[StoredRecord]) -> None:
    first = replace(records[0], kind=RecordKind.SETTINGS_ACCEPTED, body={"name": "R. Keel", "accepted": []})
    assert judge_anew([first, *records]).differences == ()


def test_settings_that_are_not_valid_any_more(records: list[StoredRecord]) -> None:
    changed = _with(records, _of(RecordKind.CONFIGURATION, kind="fleet"), text="schema: 0\n")
    assert any("the recorded settings are not valid any more" in text for text in _differences(changed))


def test_no_more_than_a_hundred_are_told(records: list[StoredRecord]) -> None:
    hold = next(record for record in records if _of(RecordKind.CHANGE, scope="limit", to="hold")(record))
    assert len(_differences([*records, *[hold] * 150])) == 100


def test_a_memory_that_cannot_be_used_is_made_again_from_the_journal(field: Field) -> None:
    field.write(field.row(0, 24.0), field.row(5, HOT_C))
    field.move_to(5)
    recorder = field.open()
    before = recorder.poll()
    recorder.close()
    for memory in ({"of": "another version"}, [1, 2]):
        history = History.open(field.history, now=field.at(5), program_version="0")
        history.append([], resume=memory)
        history.close(now=field.at(5))
        recorder = field.open()
        after = recorder.poll()
        recorder.close()
        assert after.operations == before.operations
    findings = verify_history(field.history, closing_hash=None, rejudge=True)
    assert findings.whole, findings.lines


# -- the words of `verify`


def test_verifying_says_what_it_proves_and_the_closing_hash(field: Field, records: list[StoredRecord]) -> None:
    told: list[int] = []
    findings = verify_history(field.history, closing_hash=records[4].hash.hex(), rejudge=True, progress=told.append)
    assert findings.whole
    text = "\n".join(findings.lines)
    assert f"whole and unaltered, {len(records)} records" in text
    assert f"Closing hash: {records[-1].hash.hex()}" in text
    assert "The given closing hash is that of record 5: up to there nothing changed." in text
    assert "Judged anew: 6 observations" in text
    assert told[-1] == len(records)


def test_another_closing_hash_is_a_fault_and_nothing_is_judged_anew(field: Field, records: list[StoredRecord]) -> None:
    assert records
    findings = verify_history(field.history, closing_hash="ab" * 32, rejudge=True)
    assert not findings.whole
    text = "\n".join(findings.lines)
    assert "NOT as it was recorded" in text
    assert "Not judged anew: the record itself does not hold." in text
    assert not verify_history(field.history, closing_hash="ab" * 32, rejudge=False).whole


def test_differences_are_lines_and_an_older_version_is_named(field: Field) -> None:
    field.write(field.row(0, HOT_C))
    recorder = field.open()
    recorder.poll()
    recorder.close()
    (change, *_) = (record for record in _read(field) if record.kind is RecordKind.CHANGE)
    history = History.open(field.history, now=field.at(1), program_version="0.0.1")
    number = history.append([Record(kind=change.kind, at=change.at, body=change.body)])[0]
    history.close(now=field.at(1))
    findings = verify_history(field.history, closing_hash=None, rejudge=True)
    assert not findings.whole
    text = "\n".join(findings.lines)
    assert "last written by version 0.0.1" in text
    assert f"Record {number}: a change that does not come about anew" in text
