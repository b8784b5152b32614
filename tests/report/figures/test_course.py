import numpy as np
import pytest

from plastic.report.figures.course import controls, family_of, time_course


def test_the_induction_is_shaded_from_its_start_to_its_end(bursts):
    axes = time_course(bursts, "bursts").figure(85).axes[0]
    box = axes.patches[0].get_path().get_extents(axes.patches[0].get_patch_transform())
    assert (box.x0, box.x1) == (0.0, 10.0)


def test_the_line_is_the_median_over_cells(bursts):
    rows = time_course(bursts, "bursts").rows
    row = next(
        r for r in rows
        if (r["rule"], r["route"], r["input"], r["time_min"])
        == ("pair_timing", "quantal_size", "far", 40.0)
    )  # fmt: skip
    cells = bursts["epsp_percent_of_baseline"].sel(
        rule="pair_timing", route="quantal_size", protocol="bursts", input="far"
    ).isel(reading=-1)  # fmt: skip
    assert row["median_percent"] == pytest.approx(float(np.median(cells.values)))
    assert row["lower_quartile_percent"] == pytest.approx(np.quantile(cells.values, 0.25))


def test_control_pathways_are_drawn_too(bursts):
    picture = time_course(bursts, "bursts")
    assert {row["input"] for row in picture.rows} == {"far", "side"}
    assert "thin lines without marks: side" in picture.figure(180).texts[0].get_text().replace(
        "\n", " "
    )


def test_the_axis_names_an_input_only_when_there_is_no_other(bursts):
    def axis(dataset):
        said = [t.get_text() for t in time_course(dataset, "bursts").figure(180).texts]
        return [text for text in said if "of baseline" in text]

    assert axis(bursts) == ["EPSP (% of baseline)"]
    assert axis(bursts.sel(input=["far"])) == ["EPSP of far (% of baseline)"]


def test_controls_stand_beside_their_protocol_on_the_route_they_were_run_on(bursts):
    rows = controls(bursts, "bursts").rows
    assert {row["route"] for row in rows} == {"release_probability"}
    assert list(dict.fromkeys(row["protocol"] for row in rows)) == family_of(bursts, "bursts")
    assert len(family_of(bursts, "bursts")) == 5


def test_an_arm_that_was_not_run_is_left_out(bursts):
    rows = time_course(bursts, "bursts").rows
    assert not any(
        (row["rule"], row["route"]) == ("sliding_threshold", "spine_neck") for row in rows
    )
