"""What changed since an earlier comparison: inputs by place, results and verdicts of the sets in both."""

from __future__ import annotations

import json
from collections import Counter
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from actuator_sizing.errors import InputError, Problem
from actuator_sizing.report.json_results import SCHEMA

_PARTS = ("motors", "gearheads", "drives")
_SAME = 1e-9  # results that agree to this part have not moved


@dataclass(frozen=True)
class InputChange:
    """One input that is not what it was; `old` or `new` is empty where it was not there."""

    table: str
    row: int | None
    label: str
    column: str
    old: str
    new: str


@dataclass(frozen=True)
class ResultChange:
    """One result of the leading set that moved; SI, the unit is in the name."""

    name: str
    old: float | str | None
    new: float | str | None


@dataclass(frozen=True)
class CheckChange:
    """One check of one set that is in both comparisons and whose verdict or utilisation moved."""

    set_label: str
    title: str
    old_verdict: str
    new_verdict: str
    old_utilisation: float | None
    new_utilisation: float | None
    allowed: float

    @property
    def turned(self) -> bool:
        """Whether the verdict itself changed."""
        return self.old_verdict != self.new_verdict


@dataclass(frozen=True)
class Revision:
    """The difference between two comparisons of one axis."""

    old_fingerprint: str
    old_version: str
    old_leader: str
    new_leader: str
    old_verdict: str
    new_verdict: str
    inputs: tuple[InputChange, ...]
    results: tuple[ResultChange, ...]
    checks: tuple[CheckChange, ...]

    @property
    def is_same(self) -> bool:
        """Whether nothing at all changed."""
        return not (self.inputs or self.results or self.checks) and self.old_leader == self.new_leader


def read_results(path: str | Path) -> dict[str, Any]:
    """Read an earlier ``results.json``.

    Parameters
    ----------
    path : str or Path
        The file, or the folder that holds it.

    Returns
    -------
    dict
        The results as written.

    Raises
    ------
    InputError
        If the file is missing, is no JSON, or has another schema.
    """
    file = Path(path)
    if file.is_dir():
        file = file / "results.json"
    try:
        found = json.loads(file.read_text(encoding="utf-8"))
    except OSError as reason:
        raise _unreadable(file, f"cannot be read: {reason.strerror}") from reason
    except (ValueError, RecursionError) as reason:
        raise _unreadable(file, "not JSON") from reason
    schema = found.get("schema") if isinstance(found, dict) else None
    if schema != SCHEMA:
        raise _unreadable(file, f"schema {schema!r}")
    return dict(found)


def _unreadable(file: Path, got: str) -> InputError:
    remedy = "Name the results.json of an earlier comparison, or its folder."
    return InputError([Problem(str(file), None, "", got, f"results with schema {SCHEMA!r}", remedy)])


def revision_since(old: Mapping[str, Any], new: Mapping[str, Any]) -> Revision:
    """Compare two sets of results.

    Parameters
    ----------
    old, new : mapping
        Contents of ``results.json``, as from `read_results` and `results_dict`.

    Returns
    -------
    Revision
        Inputs, results of the leading set, and checks that moved.
    """
    first, last = _leader(old), _leader(new)
    return Revision(
        old_fingerprint=str(old.get("fingerprint", "")),
        old_version=str(old.get("version", "")),
        old_leader=_label(first),
        new_leader=_label(last),
        old_verdict=str(first.get("verdict", "")),
        new_verdict=str(last.get("verdict", "")),
        inputs=tuple(_input_changes(old, new)),
        results=tuple(
            _result_changes({**old.get("cycle", {}), **_numbers(first)}, {**new["cycle"], **_numbers(last)})
        ),
        checks=tuple(_check_changes(old, new)),
    )


def _leader(results: Mapping[str, Any]) -> Mapping[str, Any]:
    sets = results.get("sets") or [{}]
    return dict(sets[0])


def _label(item: Mapping[str, Any]) -> str:
    if not item:
        return "none"
    return " + ".join(
        str(part) for part in (item.get("motor"), item.get("gearhead") or "direct", item.get("drive"))
    )


def _numbers(item: Mapping[str, Any]) -> dict[str, Any]:
    own = {name: item.get(name) for name in ("governing_check", "price", "mass_kg")}
    return {**own, **item.get("quantities", {})}


def _by_place(results: Mapping[str, Any]) -> dict[tuple[str, str, str, int], Mapping[str, Any]]:
    """Inputs by table, label, column and how many of that name came before."""
    seen: Counter[tuple[str, str, str]] = Counter()
    places: dict[tuple[str, str, str, int], Mapping[str, Any]] = {}
    for entry in results.get("case", {}).get("inputs", []):
        name = (str(entry.get("table")), str(entry.get("label")), str(entry.get("column")))
        places[(*name, seen[name])] = entry
        seen[name] += 1
    return places


def _input_changes(old: Mapping[str, Any], new: Mapping[str, Any]) -> Iterator[InputChange]:
    before, after = _by_place(old), _by_place(new)
    # Results hold the data of the leading set's parts only: another part is another leader, not a changed input.
    parts = {
        name: ({p[1] for p in before if p[0] == name}, {p[1] for p in after if p[0] == name})
        for name in _PARTS
    }
    for place in dict.fromkeys((*before, *after)):
        if place[0] in parts and parts[place[0]][0] != parts[place[0]][1]:
            continue
        was, now = before.get(place), after.get(place)
        if was is not None and now is not None and _same(was.get("value_si"), now.get("value_si")):
            continue
        there = now if now is not None else was
        assert there is not None
        yield InputChange(place[0], there.get("row"), place[1], place[2], _shown(was), _shown(now))


def _shown(entry: Mapping[str, Any] | None) -> str:
    """An input as it was typed, else as it was understood."""
    if entry is None:
        return ""
    typed = str(entry.get("as_entered") or "")
    if typed:
        return typed
    value = entry.get("value_si")
    text = f"{value:.6g}" if isinstance(value, float) else str(value)
    return f"{text} {entry.get('unit') or ''} ({entry.get('origin')})".replace("  ", " ")


def _same(old: Any, new: Any) -> bool:
    if isinstance(old, int | float) and isinstance(new, int | float):
        return abs(old - new) <= _SAME * max(abs(old), abs(new))
    return bool(old == new)


def _result_changes(old: Mapping[str, Any], new: Mapping[str, Any]) -> Iterator[ResultChange]:
    for name in dict.fromkeys((*old, *new)):
        if not _same(old.get(name), new.get(name)):
            yield ResultChange(name, old.get(name), new.get(name))


def _check_changes(old: Mapping[str, Any], new: Mapping[str, Any]) -> Iterator[CheckChange]:
    before = {_label(item): item for item in old.get("sets", [])}
    for item in new.get("sets", []):
        label = _label(item)
        if label not in before:
            continue
        known = {check["check"]: check for check in before[label].get("checks", [])}
        for check in item["checks"]:
            was = known.get(check["check"], {})
            change = CheckChange(
                label,
                check["title"],
                str(was.get("verdict", "")),
                check["verdict"],
                was.get("utilisation"),
                check["utilisation"],
                check["allowed"],
            )
            if change.turned or not _same(change.old_utilisation, change.new_utilisation):
                yield change
