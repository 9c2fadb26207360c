"""Every public function says what it takes and gives, with units that agree with the names."""

import ast
import re
from pathlib import Path

import pytest

import actuator_sizing
from actuator_sizing.units import KINDS, SUFFIXES, suffix_unit

PACKAGE = Path(actuator_sizing.__file__).parent
FOLDERS = ("core", "sizing", "case")

#: Labels that may stand in the brackets which end the description of a number.
KNOWN_UNITS = {"-", "Ω·s/rad", *SUFFIXES.values(), *(kind.si_unit for kind in KINDS.values() if kind.si_unit)}

# Types of numbers; everything else (text, tables, classes of ours) carries no unit of its own.
_NUMBER = re.compile(r"\b(float|int|array_like|ndarray)\b")
_NO_NUMBER = re.compile(
    r"of (bool|str|object)|\bdict\b|\blist\b|\btuple\b|\bmapping\b|\bsequence\b|\biterable\b"
)
_UNIT = re.compile(r"\[([^\[\]]+)\]\.?$")
_ENTRY = re.compile(r"^(\*{0,2}\w[\w, *]*?)\s*:\s*(.+)$")


def public_functions():
    for folder in FOLDERS:
        for path in sorted((PACKAGE / folder).rglob("*.py")):
            for node in ast.parse(path.read_text(encoding="utf-8")).body:
                if isinstance(node, ast.FunctionDef) and not node.name.startswith("_"):
                    name = ".".join(path.relative_to(PACKAGE).with_suffix("").parts)
                    yield pytest.param(node, id=f"{name}.{node.name}")


def sections(docstring):
    """Heading of each underlined section -> its lines."""
    found, current = {}, "Summary"
    lines = docstring.expandtabs().splitlines()
    for index, line in enumerate(lines):
        following = lines[index + 1].strip() if index + 1 < len(lines) else ""
        if following and set(following) == {"-"} and len(following) >= 3 and line.strip():
            current = line.strip()
            found[current] = []
        elif not (line.strip() and set(line.strip()) == {"-"}):
            found.setdefault(current, []).append(line)
    return found


def entries(lines):
    """(names, type, description) of a Parameters or Returns section."""
    found = []
    margin = min((len(line) - len(line.lstrip()) for line in lines if line.strip()), default=0)
    for line in lines:
        if not line.strip():
            continue
        if len(line) - len(line.lstrip()) == margin:
            match = _ENTRY.match(line.strip())
            names, kind = match.groups() if match else ("", line.strip())
            found.append([[n.strip(" *") for n in names.split(",") if n.strip(" *")], kind, ""])
        elif found:
            found[-1][2] = f"{found[-1][2]} {line.strip()}".strip()
    return [tuple(entry) for entry in found]


def parameters(node):
    arguments = node.args
    every = [
        *arguments.posonlyargs,
        *arguments.args,
        arguments.vararg,
        *arguments.kwonlyargs,
        arguments.kwarg,
    ]
    return [argument.arg for argument in every if argument is not None]


def is_number(kind):
    return bool(_NUMBER.search(kind)) and not _NO_NUMBER.search(kind)


def faults(node):
    """Everything that is wrong with the docstring of a function, as text."""
    docstring = ast.get_docstring(node)
    if not docstring:
        return ["no docstring"]
    parts = sections(docstring)
    if "Parameters" not in parts:
        # One line may do for a small function whose signature says it all.
        return []
    found = []
    documented = entries(parts["Parameters"])
    names = [name for entry in documented for name in entry[0]]
    if names != parameters(node):
        found.append(f"documents {names}, takes {parameters(node)}")
    for given, kind, text in documented:
        if is_number(kind):
            found += unit_faults(given, text)
    returns = node.returns
    gives_nothing = returns is None or (isinstance(returns, ast.Constant) and returns.value is None)
    if (
        not gives_nothing
        and not ({"Returns", "Yields"} & set(parts))
        and is_number(ast.unparse(returns).lower())
    ):
        found.append("does not document what it returns")
    for given, kind, text in entries(parts.get("Returns", [])):
        if is_number(kind):
            found += unit_faults(given or [node.name], text)
    return found


def unit_faults(names, text):
    match = _UNIT.search(text)
    if match is None:
        return [f"{', '.join(names)}: no unit in brackets at the end of '{text[-40:]}'"]
    stated = {unit.strip() for unit in re.split(r",| or ", match.group(1))}
    found = [f"{names}: unknown unit [{unit}]" for unit in stated - KNOWN_UNITS]
    for name in names:
        expected = suffix_unit(name)
        if expected is not None and expected not in stated:
            found.append(f"{name}: the name says {expected}, the description [{match.group(1)}]")
    return found


@pytest.mark.parametrize("node", list(public_functions()))
def test_docstring(node):
    assert faults(node) == []


GOOD = '''
def power(torque_nm: float, speed_rad_s: float) -> float:
    """Power.

    Parameters
    ----------
    torque_nm : float
        Torque. [N·m]
    speed_rad_s : float
        Speed. [rad/s]

    Returns
    -------
    float
        Power. [W]
    """
'''


@pytest.mark.parametrize(
    ("old", "new", "fault"),
    [
        ("Torque. [N·m]", "Torque. [N·m]", None),
        ("Torque. [N·m]", "Torque.", "no unit"),
        ("Torque. [N·m]", "Torque. [W]", "the name says N·m"),
        ("Power. [W]", "Power. [horses]", "unknown unit"),
        ("    torque_nm : float", "    torque : float", "documents"),
        ('"""Power.', '"""Power.', None),
    ],
)
def test_the_test_itself_sees_faults(old, new, fault):
    node = ast.parse(GOOD.replace(old, new)).body[0]
    found = faults(node)
    assert (found == []) if fault is None else any(fault in text for text in found)
