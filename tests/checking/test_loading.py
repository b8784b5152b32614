"""Parts by name or by file, and files that cannot be used."""

from __future__ import annotations

import sys
from pathlib import Path

import pytest

from plastic import routes, rules
from plastic.checking import loading
from plastic.checking.loading import load, names
from plastic.errors import DataError, UnknownName
from plastic.laws._cells import PassiveCell

RULE = '''
from plastic import Rule, parameter, trace, weight


class {name}(Rule):
    """A rule of a user."""

    gain: float = parameter(0.01, "1", low=0, high=1, source="invented")
    w = weight(1.0, low=0.0, high=2.0)
    r = trace("pre", tau=20.0)

    def at_post(self, {argument}: float) -> dict[str, float]:
        """Potentiate."""
        return {{"w": self.gain * r}}
'''


def written(folder: Path, text: str, name: str = "mine.py") -> str:
    (folder / name).write_text(text)
    return str(folder / name)


def one(name: str = "Mine", argument: str = "r") -> str:
    return RULE.format(name=name, argument=argument)


def test_a_name_is_that_of_the_catalogue() -> None:
    assert load("pair_timing") is rules.find("pair_timing")
    assert load("spine_neck") is routes.find("spine_neck")
    assert load("cells") is PassiveCell
    assert names() == [*rules.names(), *routes.names(), "cells"]


def test_an_unknown_name_is_refused_with_the_nearest() -> None:
    with pytest.raises(UnknownName, match="did you mean 'pair_timing'"):
        load("pair_timin")


def test_a_file_with_one_rule_needs_no_name(tmp_path: Path) -> None:
    path = written(tmp_path, one())
    assert load(path).__name__ == "Mine"
    assert load(path) is load(f"{path}:Mine")


def test_nothing_is_written_beside_the_file(tmp_path: Path) -> None:
    before = sys.dont_write_bytecode
    load(written(tmp_path, one("Quiet")))
    assert [p.name for p in tmp_path.iterdir()] == ["mine.py"]
    assert sys.dont_write_bytecode == before


def test_a_changed_file_is_read_again(tmp_path: Path) -> None:
    first = load(written(tmp_path, one()))
    second = load(written(tmp_path, one() + "\n# changed\n"))
    assert first is not second


def test_one_of_several_rules_is_named(tmp_path: Path) -> None:
    path = written(tmp_path, one("First") + one("Second"))
    with pytest.raises(DataError, match=r"several rules \(First, Second\): write .*mine.py:NAME"):
        load(path)
    assert load(f"{path}:Second").__name__ == "Second"
    with pytest.raises(UnknownName, match="did you mean 'Second'"):
        load(f"{path}:Secondd")


@pytest.mark.parametrize(
    ("text", "said"),
    [
        ("x = 1\n", "mine.py: no rule"),
        ("import math\n\ndef broken(:\n", "mine.py: line 3: SyntaxError: invalid syntax"),
        ("import math\nmath.nothing\n", "mine.py: line 2: AttributeError: "),
        ("def f():\n    raise ValueError('no')\n\nf()\n", "mine.py: line 2: ValueError: no"),
        ("raise SystemExit(3)\n", "mine.py: line 1: SystemExit: 3"),
        (one(argument="rr"), "mine.py: line 5: Mine.at_post: nothing is called 'rr' there; known"),
        (one().split("    def")[0], "mine.py: line 5: Mine: a rule needs a hook; known hooks are"),
    ],
    ids=["no rule", "syntax", "name", "deep", "exit", "unknown argument", "no hook"],
)
def test_a_file_that_cannot_be_used_is_refused_in_one_line(
    tmp_path: Path, text: str, said: str
) -> None:
    with pytest.raises(DataError) as caught:
        load(written(tmp_path, text))
    assert said in str(caught.value)


def test_a_rule_that_is_only_imported_is_none_of_the_file(tmp_path: Path) -> None:
    text = "from plastic.rules.pair_timing import PairTiming\n"
    with pytest.raises(DataError, match="no rule"):
        load(written(tmp_path, text))


def test_a_missing_file_is_named(tmp_path: Path) -> None:
    with pytest.raises(DataError, match=r"none\.py: no such file"):
        load(str(tmp_path / "none.py"))


def test_an_endless_import_is_stopped(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr(loading, "LONGEST", 0.1)
    with pytest.raises(DataError, match=r"line \d: Endless: no end within 0\.1 s"):
        load(written(tmp_path, "while True:\n    pass\n"))


def test_after_a_refusal_the_module_is_forgotten(tmp_path: Path) -> None:
    before = set(sys.modules)
    with pytest.raises(DataError):
        load(written(tmp_path, "raise ValueError\n"))
    assert {name for name in set(sys.modules) - before if name.startswith(loading.PREFIX)} == set()
