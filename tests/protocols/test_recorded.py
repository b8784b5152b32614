"""Recorded spike times from tables of text."""

from __future__ import annotations

from pathlib import Path

import pytest
from hypothesis import given
from hypothesis import strategies as st

from plastic.errors import DataError, UnknownName
from plastic.protocols._recorded import read_times


def saved(folder: Path, content: str | bytes, name: str = "far.csv") -> Path:
    path = folder / name
    path.write_bytes(content.encode() if isinstance(content, str) else content)
    return path


@given(
    st.lists(st.integers(0, 10**7), min_size=1, max_size=30, unique=True),
    st.sampled_from([("ms", 1.0), ("s", 1e3), ("us", 1e-3)]),
)
def test_written_times_are_read_back(
    tmp_path_factory: pytest.TempPathFactory, steps: list[int], unit: tuple[str, float]
) -> None:
    times = [t * 0.1 for t in sorted(steps)]
    path = saved(tmp_path_factory.mktemp("t"), "\n".join(repr(t / unit[1]) for t in times))
    assert read_times(path, unit=unit[0]) == pytest.approx(times, abs=1e-6)


@pytest.mark.parametrize(
    "content",
    [
        "1\n2\n3\n",
        "time\n1\n2\n3\n",
        "\ufefftime\r\n1\r\n2\r\n3\r\n",
        "# recorded\n1\n\n2\n3",
    ],
)
def test_headers_comments_and_line_ends_do_not_matter(tmp_path: Path, content: str) -> None:
    assert read_times(saved(tmp_path, content), unit="ms") == (1, 2, 3)


@pytest.mark.parametrize("separator", [",", ";", "\t"])
def test_a_named_column_is_found(tmp_path: Path, separator: str) -> None:
    lines = [["sweep", "spike"], ["1", "0.5"], ["2", "7"]]
    path = saved(tmp_path, "\n".join(separator.join(line) for line in lines))
    assert read_times(path, unit="ms", column="spike") == (0.5, 7)


@pytest.mark.parametrize(
    ("content", "parts"),
    [
        ("1\n3\n2\n", ["far.csv: line 3 = '2'", "later than the one before"]),
        ("1\n1\n", ["line 2 = '1'", "0.1 ms or more after"]),
        ("1\n1.05\n", ["line 2 = '1.05'", "0.1 ms or more after"]),
        ("-1\n", ["line 1 = '-1'", "0 or later"]),
        ("1\nnan\n", ["line 2 = 'nan'", "finite number"]),
        ("1\ninf\n", ["line 2 = 'inf'", "finite number"]),
        ("1\ntwo\n", ["line 2 = 'two'", "finite number"]),
        ("", ["far.csv: holds no spike times"]),
        ("time\n", ["holds no spike times"]),
        ("a,b\n1,2\n", ["line 1 = 'a, b'", "2 columns"]),
        ("1,5\n", ["2 columns", "decimals need a point"]),
        (b"\x89HDF\r\n\x1a\n\x00\x00", ["is not text"]),
        (b"\xff\xfe1", ["is not text"]),
    ],
)
def test_what_is_no_list_of_spike_times_is_refused(
    tmp_path: Path, content: str | bytes, parts: list[str]
) -> None:
    with pytest.raises(DataError) as caught:
        read_times(saved(tmp_path, content), unit="ms")
    for part in parts:
        assert part in str(caught.value)


HEADERS = ["time_s", "time (s)", "t [s]", "time/s", "spike time s", "sec", "t_seconds"]


@pytest.mark.parametrize("header", HEADERS)
def test_a_header_with_another_unit_is_refused(tmp_path: Path, header: str) -> None:
    path = saved(tmp_path, f"{header}\n1\n2\n")
    assert read_times(path, unit="s") == (1000, 2000)
    with pytest.raises(DataError, match=r"far\.csv: line 1 = .*says s\w*, but .* is 'ms'"):
        read_times(path, unit="ms")


@pytest.mark.parametrize("header", ["time", "spikes", "cell_m", "far", "axon_s1", "times (of far)"])
def test_a_header_without_a_unit_of_time_says_nothing(tmp_path: Path, header: str) -> None:
    assert read_times(saved(tmp_path, f"{header}\n1\n2\n"), unit="ms") == (1, 2)


def test_the_header_of_the_chosen_column_counts(tmp_path: Path) -> None:
    path = saved(tmp_path, "start_s,spike_ms\n1,0.5\n1,7\n")
    assert read_times(path, unit="ms", column="spike_ms") == (0.5, 7)
    with pytest.raises(DataError, match="says s,"):
        read_times(path, unit="ms", column="start_s")


def test_a_file_that_is_not_there_is_named(tmp_path: Path) -> None:
    with pytest.raises(DataError, match=r"gone\.csv: cannot be read: no such file"):
        read_times(tmp_path / "gone.csv", unit="ms")


def test_a_column_that_is_not_there_is_answered_with_the_nearest(tmp_path: Path) -> None:
    with pytest.raises(UnknownName, match=r"far\.csv: line 1: .*did you mean 'spike'"):
        read_times(saved(tmp_path, "sweep,spike\n1,2\n"), unit="ms", column="spikes")
