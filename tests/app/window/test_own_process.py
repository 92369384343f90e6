"""The process of its own ends with the window."""

from __future__ import annotations

import os

from app.process import own_process
from app.window.answers import Answers


def test_closing_the_answers_ends_the_process(qapp: object) -> None:
    answers = Answers()
    assert own_process.run(os.getpid) != os.getpid()
    assert own_process.running
    answers.close()
    assert not own_process.running


def test_a_window_that_never_needed_it_starts_none(qapp: object) -> None:
    answers = Answers()
    answers.close()
    assert not own_process.running
