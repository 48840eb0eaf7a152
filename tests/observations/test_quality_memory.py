"""The memory goes through JSON and comes back exactly."""

import json
from typing import Any

import pytest

from airfield_board.observations.quality import QualityMemory
from tests.observations.quality_rows import NAN, R, every, run


def through_json(memory: QualityMemory) -> QualityMemory:
    return QualityMemory.from_json(json.loads(json.dumps(memory.to_json(), allow_nan=False)))


def test_an_empty_one() -> None:
    assert through_json(QualityMemory()) == QualityMemory()


def test_a_full_one_to_the_last_bit() -> None:
    rows = [*every(7, 50, 0, R(0, qnh=1000.1 + 1e-10)), R(360, temp=19.9 + 1e-12, dew=10.0 / 3.0), R(365, temp=45.0)]
    _, memory = run(rows)
    assert memory.past.suspect is not None
    assert memory.past.last_dewpoint is not None
    assert through_json(memory) == memory


def test_one_without_dew_points() -> None:
    _, memory = run([R(0, dew=NAN), R(5, temp=45.0, dew=NAN)])
    assert memory.past.suspect == (memory.newest_us, 1013.0, 45.0, None)
    assert through_json(memory) == memory


def test_whole_numbers_come_back_as_floats() -> None:
    value: Any = run([R(0)])[1].to_json()
    value["past"]["last_valid"][2] = 20
    assert QualityMemory.from_json(value) == run([R(0)])[1]
    last = QualityMemory.from_json(value).past.last_valid
    assert last is not None
    assert isinstance(last.temperature_c, float)


@pytest.mark.parametrize(
    ("path", "wrong"),
    [
        ((), None),
        ((), {"newest_us": 0}),
        (("newest_us",), 1.5),
        (("newest_us",), True),
        (("past",), []),
        (("past", "last_valid"), [1, 2.0, 3.0]),
        (("past", "last_valid"), "1234"),
        (("past", "last_valid", 1), "1013"),
        (("past", "last_valid", 1), False),
        (("past", "highest_dewpoints"), {}),
        (("past", "highest_dewpoints"), [[1, 2.0, 3.0]]),
        (("before", "first_dewpoint_us"), "now"),
        (("before", "last_dewpoint"), [1.0, 2.0]),
    ],
)
def test_what_is_no_memory_is_refused(path: tuple[str | int, ...], wrong: object) -> None:
    value: Any = run([R(0), R(5)])[1].to_json()
    if path:
        place = value
        for key in path[:-1]:
            place = place[key]
        place[path[-1]] = wrong
    else:
        value = wrong
    with pytest.raises(ValueError, match="not a memory of the quality checks"):
        QualityMemory.from_json(value)
