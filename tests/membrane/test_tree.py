"""How dendrites are cut into nodes and stretches."""

from __future__ import annotations

import numpy as np
import pytest
from hypothesis import given, settings
from hypothesis import strategies as st

from plastic.errors import UnknownName
from plastic.membrane.cable import Dendrite, Tree, build_tree

APICAL = {"apical": Dendrite(350, 2), "basal": Dendrite(120, 1)}


def small_tree(refine: int = 1) -> Tree:
    return build_tree(APICAL, [("apical", 320), ("apical", 40), ("soma", 0)], refine)


def test_nodes_follow_from_near_to_far_with_the_soma_first() -> None:
    tree = small_tree()
    assert tree.n_nodes == 5
    assert tree.node_distance.tolist() == [0, 20, 40, 180, 320]
    assert tree.node_dendrite == ["soma", *["apical"] * 4]
    assert tree.node_of == {("soma", 0.0): 0, ("apical", 40): 2, ("apical", 320): 4}


def test_what_lies_beyond_the_last_place_is_one_sealed_stub() -> None:
    tree = small_tree()
    assert tree.stretch_parent.tolist() == [0, 1, 2, 3, 4, 0]
    assert tree.stretch_child.tolist() == [1, 2, 3, 4, -1, -1]
    assert tree.stretch_length.tolist() == [20, 20, 140, 140, 30, 120]
    assert tree.stretch_diameter.tolist() == [2, 2, 2, 2, 2, 1]
    assert tree.stretch_dendrite == [*["apical"] * 5, "basal"]


def test_a_place_at_the_tip_leaves_no_stub() -> None:
    tree = build_tree({"d": Dendrite(100, 1)}, [("d", 100)], 0)
    assert tree.stretch_child.tolist() == [1]
    assert tree.node_of["d", 100] == 1


@pytest.mark.parametrize("refine", [0, 1, 2, 7])
def test_each_piece_is_cut_into_refine_plus_one_equal_stretches(refine: int) -> None:
    tree = build_tree({"d": Dendrite(100, 1)}, [("d", 60), ("d", 90)], refine)
    pieces = tree.stretch_length[:-1].reshape(2, refine + 1)
    assert pieces == pytest.approx(np.array([[60], [30]]) / (refine + 1) * np.ones(refine + 1))


def test_a_point_neuron_has_one_node_and_no_stretch() -> None:
    tree = build_tree({}, [("soma", 0)], 1)
    assert (tree.n_nodes, len(tree.stretch_parent)) == (1, 0)
    assert tree.path(0) == []


def test_the_path_runs_from_the_soma_to_the_node() -> None:
    tree = small_tree()
    assert tree.path(4) == [0, 1, 2, 3]
    assert tree.path(1) == [0]
    assert tree.path(0) == []


def test_beyond_holds_the_far_end_and_everything_farther() -> None:
    tree = small_tree()
    assert tree.beyond(2) == {3, 4}
    assert tree.beyond(0) == {1, 2, 3, 4}
    assert tree.beyond(4) == set()
    assert tree.beyond(5) == set()


@given(
    places=st.lists(st.floats(1, 499), min_size=1, max_size=6),
    refine=st.integers(0, 3),
)
@settings(max_examples=60, deadline=None)
def test_no_length_is_lost_and_path_and_beyond_are_each_others_mirror(
    places: list[float], refine: int
) -> None:
    tree = build_tree({"d": Dendrite(500, 1.5)}, [("d", x) for x in places], refine)
    assert tree.stretch_length.sum() == pytest.approx(500, rel=1e-12)
    for x in places:
        assert tree.node_distance[tree.node_of["d", x]] == pytest.approx(x, abs=1e-3)
    for stretch in range(len(tree.stretch_parent)):
        on_path = {node for node in range(1, tree.n_nodes) if stretch in tree.path(node)}
        assert tree.beyond(stretch) == on_path
    for node in range(tree.n_nodes):
        length = sum(tree.stretch_length[s] for s in tree.path(node))
        assert length == pytest.approx(tree.node_distance[node], abs=1e-9)


def test_places_that_touch_share_a_node() -> None:
    """A conversion of units may turn 100 um into 100.00000000000001 um."""
    near = 100.00000000000001
    tree = build_tree({"d": Dendrite(near, 1)}, [("d", 100), ("d", near), ("d", 1e-9)], 0)
    assert tree.node_of["d", 100] == tree.node_of["d", near] == 1
    assert tree.node_of["d", 1e-9] == 0
    assert tree.n_nodes == 2


@pytest.mark.parametrize("distance", [-1.0, 350.01, float("nan"), float("inf")])
def test_a_place_outside_its_dendrite_is_refused_with_its_numbers(distance: float) -> None:
    with pytest.raises(ValueError, match=rf"{distance} um on 'apical' is outside \[0, 350\] um"):
        build_tree(APICAL, [("apical", distance)], 0)


def test_the_soma_has_no_length() -> None:
    with pytest.raises(ValueError, match=r"a place at 5 um on 'soma'"):
        build_tree(APICAL, [("soma", 5)], 0)


def test_an_unknown_dendrite_is_named_with_the_nearest_one() -> None:
    with pytest.raises(UnknownName, match=r"'apikal'; did you mean 'apical'\?"):
        build_tree(APICAL, [("apikal", 5)], 0)


def test_a_dendrite_called_soma_and_a_negative_refine_are_refused() -> None:
    with pytest.raises(ValueError, match="no dendrite may be called 'soma'"):
        build_tree({"soma": Dendrite(10, 1)}, [], 0)
    with pytest.raises(ValueError, match="refine = -1"):
        build_tree(APICAL, [], -1)


@pytest.mark.parametrize(("length", "diameter"), [(0, 1), (-5, 1), (10, 0), (10, float("nan"))])
def test_a_dendrite_without_extent_is_refused(length: float, diameter: float) -> None:
    with pytest.raises(ValueError, match="must be positive and finite"):
        Dendrite(length, diameter)
