"""Small edits of the starter study."""

from __future__ import annotations

import pytest

from plastic.errors import PlasticError, StudyError, UnknownName
from plastic.study.file import parse_study
from plastic.study.starter import STARTER


def edited(*changes: tuple[str, str]) -> str:
    """Return the starter with each old text replaced by a new one."""
    text = STARTER
    for old, new in changes:
        assert old in text, old
        text = text.replace(old, new, 1)
    return text


def refused(text: str) -> PlasticError:
    """Return the error with which a study is refused."""
    with pytest.raises((StudyError, UnknownName)) as caught:
        parse_study(text)
    return caught.value
