import pytest
from matplotlib.backends.backend_agg import FigureCanvasAgg

from plastic.report.figures.sheet import Plan
from plastic.report.figures.style import MM, WIDTHS, size_of, style
from tests.report.figures import looking


def sheet_of(count, width, **options):
    plan = Plan("A heading", "time (min)", "EPSP (mV)", ["one", "two"], **options)
    with style():
        return plan, plan.sheet(width, [f"panel {k}" for k in range(count)])


@pytest.mark.parametrize("width", WIDTHS)
@pytest.mark.parametrize("count", [1, 2, 3, 4, 5, 7, 9])
def test_panels_are_of_one_size_and_do_not_touch(count, width):
    _, sheet = sheet_of(count, width)
    boxes = [axes.get_position() for axes in sheet.panels]
    assert len(boxes) == count
    assert {round(box.width, 9) for box in boxes} == {round(boxes[0].width, 9)}
    for k, one in enumerate(boxes):
        for other in boxes[k + 1 :]:
            assert one.x1 < other.x0 or other.x1 < one.x0 or one.y1 < other.y0 or other.y1 < one.y0


def test_a_panel_is_as_high_as_the_plan_says():
    _, sheet = sheet_of(3, 85, height=31.0)
    _, height = size_of(sheet.figure)
    assert sheet.panels[0].get_position().height * height == pytest.approx(31.0)
    assert sheet.figure.get_size_inches()[0] / MM == pytest.approx(85)


def test_a_name_longer_than_the_panels_is_wrapped():
    plan = Plan("", "x", "probability that a long-named input alone fires the cell", height=20)
    with style():
        sheet = plan.sheet(180, ["only"])
        FigureCanvasAgg(sheet.figure)
        assert looking.outside(sheet.figure) == []
    assert "\n" in sheet.figure.texts[2].get_text()


def test_the_legend_names_each_series_once_from_whatever_panel():
    plan, sheet = sheet_of(2, 85)
    with style():
        sheet.panels[1].plot([0], [0], label="two")
        sheet.panels[0].plot([0], [0], label="one")
        sheet.panels[1].plot([0], [1], label="one")
        plan.legend(sheet, 85)
    (legend,) = sheet.figure.legends
    assert [text.get_text() for text in legend.get_texts()] == ["one", "two"]


def test_axes_are_shared_as_the_plan_says():
    _, same = sheet_of(2, 85)
    _, apart = sheet_of(2, 85, same_x=False, same_y=False)
    same.panels[0].set(xlim=(0, 7), ylim=(0, 9))
    apart.panels[0].set(xlim=(0, 7), ylim=(0, 9))
    assert (same.panels[1].get_xlim(), same.panels[1].get_ylim()) == ((0, 7), (0, 9))
    assert apart.panels[1].get_xlim() != (0, 7)
    assert apart.panels[1].get_ylim() != (0, 9)
