"""Parts that do not fit together: the cases that take more than one edit."""

from __future__ import annotations

from plastic.study.file import parse_study
from plastic.study.starter import STARTER
from tests.study.edits import edited, refused


def test_a_driven_input_cannot_learn() -> None:
    text = edited(
        (
            'receptor = { reversal = "-75 mV"',
            'kind = "excitatory"\nreceptor = { reversal = "-75 mV"',
        ),
        ('learns = ["weak"]', 'learns = ["brake"]'),
        ('input = "weak", alone', 'input = "brake", alone'),
    )
    assert "learns[0] = 'brake': must be an input of its own; this one is driven" in str(
        refused(text)
    )


def test_a_learner_that_no_protocol_stimulates_is_refused() -> None:
    text = edited(
        ('pattern = { weak = ["0 ms"], strong', "pattern = { strong"),
        ('test = { inputs = ["weak"], every = "30 s" }', ""),
        ('controls = ["unpaired", "test_pulses_only"]', ""),
    )
    assert "learns[0] = 'weak': must be stimulated by a protocol" in str(refused(text))


def test_events_of_a_learner_on_one_step_are_refused() -> None:
    slow = 'rise = "0 ms", decay = "9 ms"'
    text = edited(
        ('dt = "0.1 ms"', 'dt = "1 ms"'),
        ('rise = "0.5 ms", decay = "3 ms"', slow),
        ('rise = "0.5 ms", decay = "3 ms"', slow),
        ('rise = "0.5 ms", decay = "7 ms"', slow),
        ('weak = ["0 ms"]', 'weak = ["0 ms", "0.3 ms"]'),
    )
    message = str(refused(text))
    assert "protocol.bursts = '600000 ms and 600000 ms'" in message
    assert "two events of 'weak' that fall on the same step of dt = 1 ms" in message
    parse_study(text.replace('"0.3 ms"]', '"1 ms"]'))


def test_blocking_needs_inhibition() -> None:
    text = STARTER[: STARTER.index("[input.brake]")] + STARTER[STARTER.index("[protocol.bursts]") :]
    parse_study(text)
    text = text.replace('"test_pulses_only"', '"inhibition_blocked"', 1)
    assert "controls[1] = 'inhibition_blocked': there is no inhibitory input" in str(refused(text))
