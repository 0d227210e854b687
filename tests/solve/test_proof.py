"""The two runs beside the boundary are kept, and say what was said of them."""

from __future__ import annotations

from pathlib import Path

import pytest
from checked import made

import frontend_sim as fe
from frontend_sim.errors import OutputError
from frontend_sim.solve import keep_proof, solve_for

SCENARIO = made({"kind": "settling", "within": "0.5 LSB", "before": "300 us"})


def test_records_and_scenarios_of_both_sides(tmp_path: Path) -> None:
    """Records have their verdicts; the scenarios beside them load and run to the same codes."""
    found = solve_for(SCENARIO, "chain[1].resistance", "1k", "100k", "most")
    files = keep_proof(found, tmp_path / "proof")
    assert [file.name for file in files] == [
        "passes.toml", "passes.h5", "fails.toml", "fails.h5",
    ]  # fmt: skip
    for name, verdict in (("passes", "holds"), ("fails", "fails")):
        scenario = fe.load_scenario(tmp_path / "proof" / f"{name}.toml")
        assert "chain[input filter].resistance = " in scenario.title
        with fe.open_record(tmp_path / "proof" / f"{name}.h5") as record:
            assert record.verdict == verdict
            assert (fe.simulate(scenario).codes == record.codes).all()


def test_nothing_is_replaced_without_being_asked(tmp_path: Path) -> None:
    """What is there stays, and the message says how to replace it."""
    found = solve_for(SCENARIO, "chain[1].resistance", "1k", "100k", "most")
    keep_proof(found, tmp_path)
    with pytest.raises(OutputError, match="--overwrite"):
        keep_proof(found, tmp_path)
    assert len(keep_proof(found, tmp_path, overwrite=True)) == 4
    with pytest.raises(OutputError, match="is a file"):
        keep_proof(found, tmp_path / "passes.h5")
    with pytest.raises(OutputError, match="there is no directory"):
        keep_proof(found, tmp_path / "a" / "b")


def test_a_side_without_a_run_has_no_record(tmp_path: Path) -> None:
    """A wait beyond the end of the run is kept as a scenario alone; a bound has no other side."""
    found = solve_for(SCENARIO, "check[1].before", "1 ms", "1 s", "most")
    names = [file.name for file in keep_proof(found, tmp_path / "one")]
    assert names[:2] == ["passes.toml", "passes.h5"]
    assert "fails.h5" not in names
    found = solve_for(SCENARIO, "check[1].before", "1 ms", "2 ms", "most")
    names = [file.name for file in keep_proof(found, tmp_path / "two")]
    assert names == ["passes.toml", "passes.h5"]


def test_an_earlier_proof_leaves_no_side_behind(tmp_path: Path) -> None:
    """Where the new answer is a bound, the old neighbour that failed is no part of its proof."""
    keep_proof(solve_for(SCENARIO, "chain[1].resistance", "1k", "100k", "most"), tmp_path)
    (tmp_path / "notes.txt").write_text("mine")
    bound = solve_for(SCENARIO, "chain[1].resistance", "1k", "2k", "most")
    keep_proof(bound, tmp_path, overwrite=True)
    names = sorted(file.name for file in tmp_path.iterdir())
    assert names == ["notes.txt", "passes.h5", "passes.toml"]
    none = solve_for(SCENARIO, "chain[1].resistance", "50k", "100k", "most")
    assert keep_proof(none, tmp_path, overwrite=True) == ()
    assert sorted(file.name for file in tmp_path.iterdir()) == names


def test_the_deciding_corner_is_kept(tmp_path: Path) -> None:
    """Of a tolerance the proof has the parts at the corner that decides."""
    found = solve_for(SCENARIO, "chain[1].resistance.tolerance", "0.1 %", "90 %", "most")
    assert found.value is None or found.beyond is not None or found.shape == "all pass"
    tight = solve_for(
        made({"kind": "settling", "within": "0.5 LSB", "before": "400 us"}),
        "chain[1].resistance.tolerance", "0.1 %", "50 %", "most",
    )  # fmt: skip
    keep_proof(tight, tmp_path)
    scenario = fe.load_scenario(tmp_path / "fails.toml")
    assert tight.beyond is not None
    share = tight.beyond.values[0]
    assert scenario.chain[0].resistance == pytest.approx(10e3 * (1.0 + share))
