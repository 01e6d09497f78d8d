from dataclasses import replace

import pytest
from stand_ins import met

from nightcap.comparison import Comparison
from nightcap.result import Result, failed_result
from nightcap.screen import result_lines, summary_lines


@pytest.mark.parametrize("size", [1, 2, 5, 12, 37])
def test_nothing_is_wider_than_80_columns(size: int) -> None:
    result = replace(met("a/rather/long/case/name", size), title="long " * 40, warnings=("wide " * 40,))
    assert max(map(len, result_lines(result))) <= 80


def test_every_entry_of_a_matrix_is_printed_in_blocks() -> None:
    text = "\n".join(result_lines(met(size=9)))
    assert text.count("66.6") == 0
    assert text.count("(") >= 2 * 81


def test_table_says_what_was_asked_and_reached() -> None:
    lines = list(result_lines(met()))
    assert lines[0] == "case: met"
    text = "\n".join(lines)
    assert "accuracy 1.0e-04 requested, 1.0e-05 reached" in text
    assert "62.50000(50)" in text
    assert "on the diagonal to the reference, screen" in text


def test_many_conductors_name_the_strongest_neighbour() -> None:
    result = met(size=13)
    assert result.capacitance is not None
    result.capacitance.value[0, 9] = result.capacitance.value[9, 0] = -9e-12
    row = next(line for line in result_lines(result) if line.split()[0] == "w1")
    assert row.split()[-1] == "w10"


def test_disagreement_and_limits_are_said() -> None:
    off = Comparison(0.02, 1e-4, "from memory", inside_bracket=False)
    result = replace(met(), status="not_met", reason="time is up", comparison=off)
    text = "\n".join(result_lines(result))
    assert "case: not met (time is up)" in text
    assert "DISAGREES" in text
    assert "OUTSIDE the bracket" in text


def test_summary_counts_every_kind() -> None:
    results: list[Result] = [met("one"), replace(met("two"), status="not_met"), failed_result("x" * 90, ())]
    lines = list(summary_lines(results))
    assert lines[-1] == "3 cases: 1 met, 1 not met, 1 failed"
    assert max(map(len, lines)) <= 80
