"""What the whole analysis carries of stability, noise, shorts and supply states."""

from __future__ import annotations

from modgen.analysis import analyse_board


def test_every_result_reaches_the_analyses(lanes, spec):
    found = analyse_board(lanes(2, inside=True).board(), spec)
    assert [r.section for r in found.stability] == ["U1A", "U1B", "U2A", "U2B"]
    assert [(n.channel, n.end) for n in found.noise] == [(1, "fast"), (1, "slow"), (2, "fast"), (2, "slow")]
    assert [(s.channel, s.against) for s in found.shorts] == [
        (n, against) for n in (1, 2) for against in ("0 V", "another output")
    ]
    assert [d.package for d in found.dissipation] == ["U1", "U2"]
    assert [r.rail for r in found.reversed_supply] == ["V+", "V-"]
    assert [r.rail for r in found.missing_rails] == ["V+", "V-"]
    assert {b.subject for b in found.powered_off} == {"input", "output", "jack", "rail"}
    # a board as it is designed keeps every limit
    for results in (
        found.stability,
        found.noise,
        found.shorts,
        found.dissipation,
        found.reversed_supply,
        found.missing_rails,
        found.powered_off,
    ):
        assert all(r.margin > 0 for r in results), min(results, key=lambda r: r.margin)
