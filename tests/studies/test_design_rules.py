from __future__ import annotations

import math

import pytest

from aggsim.errors import InputError
from aggsim.studies import design_rules
from aggsim.studies.design_rules import Departure, DesignRule, figures, outside

RULES = [rule for rule in vars(design_rules).values() if isinstance(rule, DesignRule)]


@pytest.mark.parametrize("rule", RULES, ids=lambda rule: rule.name)
def test_every_rule_says_where_it_stands_and_asks_something(rule: DesignRule) -> None:
    assert rule.source
    ends = (*rule.shear_rate, *rule.detention_time, *rule.camp_number)
    assert any(end is not None for end in ends)


def test_limits_belong_to_the_range() -> None:
    assert not outside(10.0, (10.0, 75.0))
    assert not outside(75.0, (10.0, 75.0))
    assert outside(9.99, (10.0, 75.0))
    assert outside(75.01, (10.0, 75.0))
    assert not outside(1e9, (10.0, None))
    assert not outside(0.0, (None, None))


def test_a_departure_reads_as_a_sentence() -> None:
    rule = DesignRule(name="own code", detention_time=(600.0, None), camp_number=(None, 1e5), source="me")
    short = Departure("tank", None, "time", 500.0, rule.detention_time, rule)
    assert str(short) == "tank: time of 500 s is below 600 s (own code)"
    much = Departure("tank", "winter", "G t", 123456.0, rule.camp_number, rule)
    assert str(much) == "tank, winter: G t of 123000 is above 100000 (own code)"


@pytest.mark.parametrize(
    ("value", "text"),
    [
        (0.0, "0"),
        (math.inf, "inf"),
        (0.00123456, "0.00123"),
        (0.3, "0.300"),
        (75.68, "75.7"),
        (999.4, "999"),
        (9.999, "10.0"),
        (123456.0, "123000"),
    ],
)
def test_figures_have_three_digits(value: float, text: str) -> None:
    assert figures(value) == text


@pytest.mark.parametrize(
    ("options", "words"),
    [
        ({"shear_rate": 50.0}, "None for an open end"),
        ({"shear_rate": (75.0, 10.0)}, r"Try: \(10, 75\)"),
        ({"camp_number": (-1.0, None)}, "camp_number=-1"),
        ({"detention_time": (math.nan, 30.0)}, "detention_time=nan"),
    ],
)
def test_bad_ranges_are_refused(options: dict[str, object], words: str) -> None:
    with pytest.raises(InputError, match=words):
        DesignRule(name="x", source="y", **options)  # type: ignore[arg-type]
