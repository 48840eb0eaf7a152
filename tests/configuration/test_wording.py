from datetime import datetime

import pytest

from airfield_board.configuration.fields import FileSection
from airfield_board.configuration.looseness import Aspect
from airfield_board.configuration.setting_texts import aspect_text, number_text
from airfield_board.configuration.validation import validate
from airfield_board.configuration.wording import listed, suggestion
from airfield_board.configuration.yaml_reader import read_document


def test_the_nearest_known_word_is_suggested() -> None:
    known = ("stale_after_min", "poll_s", "America/Los_Angeles")

    assert suggestion("stale_after", known) == "stale_after_min"
    assert suggestion("STALE-AFTER-MIN", known) == "stale_after_min"
    assert suggestion("america/los_angles", known) == "America/Los_Angeles"
    assert suggestion("colour", known) == ""
    assert suggestion("stale_after_min" * 10, known) == ""


def test_words_are_listed_as_a_sentence_has_them() -> None:
    assert listed(["a"]) == "a"
    assert listed(["a", "b"]) == "a or b"
    assert listed(["a", "b", "c"]) == "a, b or c"


@pytest.mark.parametrize(
    ("number", "expected"),
    [(6350.0, "6,350"), (0.5, "0.5"), (-0.0, "0"), (-3.25, "-3.25"), (100.0, "100"), (1 / 3, "0.333333")],
)
def test_numbers_have_no_more_decimals_than_they_need(number: float, expected: str) -> None:
    assert number_text(number) == expected


def test_no_limit_is_told_as_none() -> None:
    assert aspect_text((), Aspect.LIMIT) == "none"


def test_a_kind_of_fault_without_words_of_its_own_has_those_of_the_library() -> None:
    class Appointment(FileSection):
        at: datetime

    document = read_document("at: noon\n", "file.yaml")
    values, (fault,) = validate(Appointment, document)

    assert values is None
    assert str(fault).startswith("file.yaml:1: at: ")
    assert "datetime" in fault.message
