from __future__ import annotations

import pytest

from aggsim.result import Outcome, RunStatistics, Status


@pytest.mark.parametrize("outcome", list(Outcome))
def test_every_outcome_reads_as_a_sentence_with_its_time(outcome: Outcome) -> None:
    text = str(Status(outcome, 12.5, "More to say."))
    assert text == f"{outcome.value} (t = 12.5 s). More to say."
    assert Status(outcome, 1.0).completed is (outcome is Outcome.COMPLETED)


def test_statistics_read_as_a_line() -> None:
    assert str(RunStatistics(10, 2, 5, 1, 0, 0.0123)) == (
        "10 rate and 2 Jacobian evaluations, 5 steps, 1 restarts, 0 grid extensions, 12.3 ms"
    )
