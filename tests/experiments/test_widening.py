"""The experiment on widening: its closed forms, its points, its figure, its claims."""

from __future__ import annotations

import re
import sys
from collections.abc import Iterator
from pathlib import Path
from types import ModuleType

import matplotlib.image
import numpy as np
import pytest
from scipy.optimize import brentq

FOLDER = Path(__file__).parents[2] / "experiments" / "widening"
README = (FOLDER / "README.md").read_text(encoding="utf-8")


@pytest.fixture(scope="module")
def points() -> Iterator[ModuleType]:
    """The script's points, imported as the script does; it lives outside the package."""
    with pytest.MonkeyPatch.context() as patch:
        patch.syspath_prepend(str(FOLDER))
        patch.setattr(sys, "dont_write_bytecode", True)
        import points as module

        yield module
        sys.modules.pop("points")


@pytest.fixture(scope="module")
def run(points: ModuleType) -> Iterator[ModuleType]:
    """The script; its sibling is importable while `points` is."""
    import run as module

    yield module
    sys.modules.pop("run")


@pytest.fixture(scope="module")
def kept(points: ModuleType) -> list[object]:
    return list(points.read_points(FOLDER / "points.csv"))


def chosen(kept: list[object], **wanted: object) -> list[object]:
    return [p for p in kept if all(getattr(p, k) == v for k, v in wanted.items())]


def fine_peak(diameter: float, load: float, g: float, count: int = 2000) -> float:
    """Return the steady EPSP at the soma, mV: a chain of resistors, by another road.

    20 kohm cm^2 and 150 ohm cm; conductances in nS. Walks from the sealed tip to the soma.
    """
    piece = 500.0 / count  # um
    leak = np.pi * diameter * piece * 1e-8 / 20_000.0 * 1e9
    link = 1e9 / (4 * 150.0 * piece * 1e-4 / (np.pi * (diameter * 1e-4) ** 2))
    # what the tip sees: its half leak and the synapse; current source g E at the tip
    total, source = g + leak / 2, g * 65.0
    for k in range(count):
        share = link / (link + total)  # of the source that goes on, by Norton's theorem
        source, total = source * share, total * share
        total += leak if k < count - 1 else leak / 2
    return source / (total + load)


@pytest.mark.parametrize("load", [10.0, 0.63])
@pytest.mark.parametrize("g", [1e-3, 1.0, 5.0])
@pytest.mark.parametrize("diameter", [0.5, 2.0, 6.0])
def test_the_closed_form_is_the_slope_of_a_chain_of_resistors(
    points: ModuleType, diameter: float, load: float, g: float
) -> None:
    """2000 pieces; central difference of 0.1 %."""
    peaks = [fine_peak(diameter * f, load, g) for f in (0.999, 1.001)]
    slope = np.log(peaks[1] / peaks[0]) / np.log(1.001 / 0.999)
    assert float(points.steady_sensitivity(diameter, load, g)) == pytest.approx(slope, abs=1e-5)


@pytest.mark.parametrize("load", [0.4, 0.63, 10.0, 40.0])
def test_the_sign_rule_is_where_the_closed_form_is_nothing(points: ModuleType, load: float) -> None:
    """Root of the weak S by scipy; the rule is 3 there and falls with the diameter."""
    root = brentq(lambda d: float(points.steady_sensitivity(d, load, 0.0)), 0.1, 20.0)
    assert float(points.criterion(root, load)) == pytest.approx(3.0, abs=1e-6)
    assert points.best_diameter(load) == pytest.approx(root, rel=1e-6)
    assert float(points.criterion(0.9 * root, load)) > 3 > float(points.criterion(1.1 * root, load))


def test_the_kept_points_are_complete(points: ModuleType, kept: list[object]) -> None:
    assert len(chosen(kept, panel="sensitivity")) == 2 * 2 * 3 * len(points.DIAMETERS)
    assert len(chosen(kept, panel="map")) == 2 * len(points.MAPPED) * len(points.LOADS)


def test_the_theory_beside_the_kept_points_is_the_closed_form(
    points: ModuleType, kept: list[object]
) -> None:
    for p in chosen(kept, panel="sensitivity"):
        closed = points.steady_sensitivity(p.diameter, p.load, p.conductance)  # type: ignore[attr-defined]
        assert p.theory == pytest.approx(float(closed), abs=1e-5)  # type: ignore[attr-defined]


def off(kept: list[object], **wanted: object) -> float:
    """Return how far the steady points are from their theory, at most."""
    steady = chosen(kept, panel="sensitivity", time_course="steady", **wanted)
    return max(abs(p.measured - p.theory) for p in steady)  # type: ignore[attr-defined]


def test_steady_points_lie_on_the_closed_form(kept: list[object]) -> None:
    """As the README has it; the conductance of the strong ones falls by 2 % until the peak."""
    assert off(kept) < 0.0071
    assert off(kept, conductance=0.001) < 0.0015


def test_every_cell_of_the_maps_is_on_its_side(kept: list[object]) -> None:
    cells = chosen(kept, panel="map")
    assert {np.sign(p.measured) for p in cells} == {-1.0, 1.0}  # type: ignore[attr-defined]
    assert all(p.measured * p.theory > 0 for p in cells)  # type: ignore[attr-defined]
    weak = chosen(kept, panel="map", conductance=0.001)
    assert all((p.measured > 0) == (p.criterion > 3) for p in weak)  # type: ignore[attr-defined]


@pytest.mark.parametrize(("g", "sign"), [(0.001, 1), (1.0, -1), (5.0, -1)])
def test_brevity_helps_weak_inputs_and_not_strong_ones(
    kept: list[object], g: float, sign: int
) -> None:
    """Against the closed form of the steady input; 0.005 for the step of 5 % and own errors."""
    brief = chosen(kept, panel="sensitivity", time_course="brief", conductance=g)
    above = np.array([p.measured - p.theory for p in brief])  # type: ignore[attr-defined]
    assert np.all(sign * above > -0.005)
    assert sign * np.median(above) > 0.05


def test_simulating_again_gives_the_kept_points(points: ModuleType, kept: list[object]) -> None:
    """One diameter of the lone soma, steady and brief, and one cell of the map."""
    d = points.DIAMETERS[4]
    again = points.curve_points(points.LONE, [d])
    before = [
        p
        for p in chosen(kept, panel="sensitivity", load=points.LONE)
        if abs(p.diameter - d) < 1e-4  # type: ignore[attr-defined]
    ]
    assert [p.measured for p in again] == pytest.approx(
        [p.measured for p in before],  # type: ignore[attr-defined]
        abs=1e-4,
    )
    (weak, strong) = points.map_points([points.MAPPED[2]], [points.LOADS[3]])
    assert (weak.measured > 0, strong.measured > 0) == (True, True)
    assert weak.measured == pytest.approx(weak.theory, abs=0.01)


def test_a_dendrite_is_widened_in_vain_beyond_its_synapse(points: ModuleType) -> None:
    """The last table of the README; +0.12, +5.09, -0.65, +1.95 % and so on by a fine cable of 100
    pieces (computed before the package)."""
    fine = [(0.12, 0.12, 0.0), (5.09, 5.09, 0.0), (-0.65, 1.63, -2.64), (1.95, 3.99, -2.26)]
    told = re.findall(r"^\| (?:tip|middle) \| .*$", README, re.MULTILINE)
    rows = points.parts()
    for row, expected, line in zip(rows, fine, told, strict=True):
        assert row[2:] == pytest.approx(expected, abs=0.06)
        numbers = [float(x) for x in re.findall(r"([+-][\d.]+) %", line)]
        assert numbers == pytest.approx(list(row[2:])[: len(numbers)], abs=0.006)


def test_the_table_of_the_readme_is_the_root_of_the_closed_form(points: ModuleType) -> None:
    told = re.findall(r"^\| steady, .*? \| ([\d.]+) µm \| ([\d.]+) µm \|$", README, re.MULTILINE)
    assert len(told) == len(points.STRENGTHS)
    for g, row in zip(points.STRENGTHS, told, strict=True):
        for load, text in zip((points.CELL, points.LONE), row, strict=True):
            root = brentq(
                lambda d, load=load, g=g: float(points.steady_sensitivity(d, load, g)), 0.2, 20.0
            )
            assert float(text) == pytest.approx(root, abs=0.006)


def test_it_imports_the_public_door_only() -> None:
    text = "\n".join((FOLDER / name).read_text() for name in ("run.py", "points.py"))
    assert re.findall(r"^(?:import|from) plastic.*$", text, re.MULTILINE) == ["import plastic"]


def test_kept_points_are_drawn_again_one_column_wide(
    run: ModuleType, tmp_path: Path, capsys: pytest.CaptureFixture[str]
) -> None:
    run.main(["--points", str(FOLDER / "points.csv"), "--out", str(tmp_path / "out")])
    said = capsys.readouterr().out
    assert "54 points, at most 0.0070 from the closed form" in said
    assert "72 cells, 0 on the other side of the border" in said
    out = tmp_path / "out"
    assert (out / "points.csv").read_bytes() == (FOLDER / "points.csv").read_bytes()
    width = re.search(r'width="([\d.]+)pt"', (out / "widening.svg").read_text())
    assert width is not None
    assert float(width[1]) * 25.4 / 72 == pytest.approx(85, abs=0.1)
    drawn, shown = (matplotlib.image.imread(f / "widening.png") for f in (out, FOLDER))
    assert drawn.shape[1] / 300 * 25.4 == pytest.approx(85, abs=0.1)
    assert drawn.shape == shown.shape


def test_a_file_of_other_columns_is_refused(points: ModuleType, tmp_path: Path) -> None:
    (tmp_path / "other.csv").write_text("a,b\n1,2\n")
    with pytest.raises(SystemExit, match="the columns must be panel, diameter_um"):
        points.read_points(tmp_path / "other.csv")
    points.write_points(tmp_path / "none.csv", [])
    assert points.read_points(tmp_path / "none.csv") == []
