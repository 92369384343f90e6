"""Why a number is what it is: inputs, formulas and intermediate values, so that it can be checked by hand."""

from __future__ import annotations

from app.explanations.explain import explain
from app.explanations.explanation import Explanation, Input, Origin, Step, StepKind
from app.explanations.text import explanation_body, explanation_text

__all__ = ["Explanation", "Input", "Origin", "Step", "StepKind", "explain", "explanation_body", "explanation_text"]
