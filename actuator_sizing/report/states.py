"""How a verdict is coloured and worded, alike in every format."""

from __future__ import annotations

from actuator_sizing.sizing.results import ADVICE_MET, ADVICE_NOT_MET, FAILS, LOW_RESERVE, NOT_CHECKED, PASSES

_STATES = {
    PASSES: "passes",
    ADVICE_MET: "passes",
    LOW_RESERVE: "low",
    ADVICE_NOT_MET: "low",
    NOT_CHECKED: "open",
    FAILS: "fails",
}
_WORDS = {
    PASSES: "Passes",
    LOW_RESERVE: "Passes with low reserve",
    NOT_CHECKED: "Not completely checked",
    FAILS: "Fails",
}


def state_of(verdict: str) -> str:
    """Name the look of a verdict: passes, low, open or fails; empty for no verdict."""
    return _STATES.get(verdict, "open") if verdict else ""


def headline(verdict: str) -> str:
    """Word a verdict for the head of the report."""
    return _WORDS.get(verdict, verdict)
