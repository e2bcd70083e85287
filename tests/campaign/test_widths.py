"""The table of widths against the textbook rules."""

from campaign.widths import rows, table


def test_the_rules_never_fall_short() -> None:
    made = list(rows())
    assert len(made) > 40
    for row in made:
        assert row.exact <= row.by_sum
        assert row.exact <= row.by_count
    assert {row.by_sum - row.exact for row in made} == {0, 1}
    assert "align6 (first pass)" in table(made)
