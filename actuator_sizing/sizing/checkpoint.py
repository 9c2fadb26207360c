"""What a long screening found so far, kept on the disk so that it can go on after a stop."""

from __future__ import annotations

import hashlib
import io
import json
import time
import zipfile
from collections.abc import Callable
from pathlib import Path
from typing import Any

import numpy as np

from actuator_sizing.errors import InputError, OutputError, Problem, StoppedError
from actuator_sizing.files import write_atomically
from actuator_sizing.sizing.shard import Found
from actuator_sizing.version import __version__

_FORMAT = "actuator-sizing/screening/1"
_EVERY_S = 5.0  # what a stop without warning may cost
_LISTS = ("survivors", "losers", "by_drive")


class Checkpoint:
    """Keeps what was found in a file that is replaced whole, and only ever for the inputs that it belongs to.

    Parameters
    ----------
    path : Path
        The file.
    inputs : str
        What the result depends on, in words or as a fingerprint; another case cannot go on from this file.
    tell : callable, optional
        Called with a sentence for the user: where the work goes on, or why it cannot be kept.
    """

    def __init__(self, path: Path, inputs: str, tell: Callable[[str], None] | None = None):
        self.path = path
        self._fingerprint = hashlib.sha256(f"{_FORMAT}\n{__version__}\n{inputs}".encode()).hexdigest()
        self._tell = tell or (lambda _sentence: None)
        self._saved_at = time.monotonic()
        self._broken = False

    def load(self, found: Found) -> tuple[Found, set[int]]:
        """What an earlier run left.

        Parameters
        ----------
        found : Found
            Empty answer that what was found is added to. [-]

        Returns
        -------
        found, done : Found, set of int
            What was found, and the numbers of the shards that are done. [-]

        Raises
        ------
        InputError
            If the file is no checkpoint, or one of other inputs.
        """
        try:
            content = self.path.read_bytes()
        except FileNotFoundError:
            return found, set()
        except OSError as error:
            raise self._unusable(error.strerror or str(error), "a file that can be read") from error
        try:
            with np.load(io.BytesIO(content), allow_pickle=False) as stored:
                arrays = dict(stored)
            about = json.loads(str(arrays["about"]))
        except (ValueError, KeyError, OSError, EOFError, zipfile.BadZipFile) as error:
            raise self._unusable("something else", "what a stopped comparison has left") from error
        if about.get("fingerprint") != self._fingerprint:
            raise self._unusable(
                "the state of other inputs, options or version", "that of the case as it is now"
            )
        return self._restored(found, about, arrays)

    def _restored(
        self, found: Found, about: dict[str, int], arrays: dict[str, Any]
    ) -> tuple[Found, set[int]]:
        for name in _LISTS:
            getattr(found, name).add(arrays[f"{name}_rows"], arrays[f"{name}_keys"])
        found.losses.counts += arrays["counts"]
        found.losses.keep(arrays["lost_rows"], arrays["lost_checks"], arrays["lost_bounds"])
        done = set(arrays["done"].tolist())
        self._tell(f"Going on where the last run stopped: {about['percent']} % was screened ({self.path}).")
        restored = Found(about["survivor_count"], found.losses, found.survivors, found.losers, found.by_drive)
        return restored, done

    def _unusable(self, got: str, allowed: str) -> InputError:
        remedy = "Name another file with --checkpoint, or delete this one to begin anew."
        return InputError([Problem(str(self.path), None, "", got, allowed, remedy)])

    def save(self, found: Found, done: set[int], part_done: float, *, at_once: bool = False) -> bool:
        """Keep what was found, at most every few seconds; returns whether the file is as new as that.

        Parameters
        ----------
        found : Found
            What was found. [-]
        done : set of int
            Numbers of the shards that are done. [-]
        part_done : float
            The same as a part of all. [-]
        at_once : bool
            Whether to write now, however new the file is. [-]

        Returns
        -------
        bool
            False where it was not written. A disk that is full stops the keeping, not the work. [-]
        """
        now = time.monotonic()
        if not at_once and (self._broken or now - self._saved_at < _EVERY_S):
            return False
        self._saved_at = now
        try:
            write_atomically(self.path, self._content(found, done, part_done))
        except OutputError as error:
            if not self._broken:
                self._tell(f"{error} The screening goes on, but what it finds is not kept.")
            self._broken = True
            return False
        return True

    def _content(self, found: Found, done: set[int], part_done: float) -> bytes:
        about = {
            "fingerprint": self._fingerprint,
            "survivor_count": found.survivor_count,
            "percent": int(100.0 * part_done),
        }
        arrays: dict[str, Any] = {
            "about": np.array(json.dumps(about)),
            "done": np.array(sorted(done), dtype=np.int64),
            "counts": found.losses.counts,
        }
        for name in _LISTS:
            arrays[f"{name}_rows"], arrays[f"{name}_keys"] = getattr(found, name).best()
        for part, values in zip(("rows", "checks", "bounds"), found.losses.table(), strict=True):
            arrays[f"lost_{part}"] = values
        stream = io.BytesIO()
        np.savez(stream, **arrays)
        return stream.getvalue()

    def stopped_later(self) -> StoppedError:
        """Word the end of a run that the user has stopped when the screening was done."""
        text = "Stopped after the screening, while the sets that may pass were evaluated."
        if self._broken or not self.path.exists():
            return StoppedError(f"{text} Nothing could be kept.")
        return StoppedError(f"{text} Run the same command again to go on ({self.path}).")

    def stopped(self, found: Found, done: set[int], part_done: float) -> StoppedError:
        """Keep what was found and word the end of a run that the user has stopped."""
        kept = self.save(found, done, part_done, at_once=True)
        sets = f"{found.survivor_count:,}".replace(",", " ")
        text = f"Stopped after {100.0 * part_done:.0f} % of the screening; {sets} sets so far may pass."
        if kept:
            return StoppedError(f"{text} Run the same command again to go on ({self.path}).")
        if self.path.exists():
            return StoppedError(
                f"{text} {self.path} keeps an earlier state; the same command goes on from there."
            )
        return StoppedError(f"{text} Nothing could be kept.")

    def remove(self) -> None:
        """Delete the file: the work is done."""
        try:
            self.path.unlink(missing_ok=True)
        except OSError as error:
            self._tell(f"Cannot delete '{self.path}': {error.strerror or error}. It is of no use any more.")
