"""What the commands share: exit statuses, options, the folder of a report."""

from __future__ import annotations

from collections.abc import Callable
from pathlib import Path
from typing import Any

import click

PASSED, NONE_PASSES, BAD_INPUT, INTERNAL = 0, 1, 2, 3
INTERRUPTED, BROKEN_PIPE = 130, 141  # 128 + number of the signal, as shells report it


def _remember_debug(context: click.Context, _parameter: click.Parameter, value: bool) -> None:
    if value:
        context.find_root().ensure_object(dict)["debug"] = True


debug = click.option(
    "--debug",
    is_flag=True,
    expose_value=False,
    callback=_remember_debug,
    help="Show the traceback of an error.",
)


def case_argument(name: str) -> Callable[[Any], Any]:
    """Path of a case, which must exist."""
    return click.argument(name, type=click.Path(exists=True, path_type=Path))


def one_set(command: Callable[..., Any]) -> Callable[..., Any]:
    """Options that name one set by its parts."""
    for option in (
        click.option("--drive", metavar="NAME", help="Drive."),
        click.option("--gearhead", metavar="NAME", help="Gearhead; without it, direct drive."),
        click.option("--motor", metavar="NAME", help="Motor; without any part, the best set of 'compare'."),
    ):
        command = option(command)
    return command


def report_folder(name: str) -> Path:
    """``reports/<case name>`` with what a file system may refuse replaced."""
    safe = "".join("_" if c in '<>:"/\\|?*' or not c.isprintable() else c for c in name).strip(" .")
    return Path("reports") / (safe or "case")
