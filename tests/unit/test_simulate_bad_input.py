"""Bad input to the command `simulate`: words, status 2, and no run that does not end."""

import shutil
from pathlib import Path

import pytest

from actuator_sizing import cli

DEMO = Path(cli.__file__).parents[1] / "catalogs_demo"
SET = ["--motor", "sine-80m-325f", "--gearhead", "planet-60-3", "--drive", "feed-325-3rms"]


def run(capsys, *arguments, case=DEMO / "tray_lift"):
    with pytest.raises(SystemExit) as left:
        cli.main(["simulate", str(case), *map(str, arguments)])
    return left.value.code, capsys.readouterr()


@pytest.mark.parametrize(
    ("arguments", "words"),
    [
        (["--set", "speed_gain_a_s_per_rad=1e5"], "unstable"),
        (["--set", "current_gain_v_per_a=1e9"], "unstable"),
        (["--set", "position_gain_per_s=nan"], "position_gain_per_s"),
        (["--set", "is_delayed=3"], "yes or no"),
        (["--set", "current_limit_a=yes"], "a number"),
        (["--set", "anti_windup=none"], "back-calculation"),
        (["--set", "notch_rad_s=1e9"], "half the sampling rate"),
        (["--set", "sample_time_s=0.1"], "sampling rate has its own"),
        (["--rate", "30"], "sampling rate of 30 Hz"),
        (["--rate", "0.1"], "sampling rate|ten samples"),
        (["--rate", "nan"], "sampling rate"),
        (["--rate", "-5"], "range"),
        (["--rate", "1e9"], "1 MHz"),
        (["--cycles", "100000"], "10 000 000 samples"),
        (["--cycles", "0"], "range"),
        (["--input", "nowhere.csv"], "nowhere.csv"),
        (["--input", "stop", "--set", "speed_reset_time_s=0"], "speed_reset_time_s"),
    ],
)
def test_bad_requests(capsys, arguments, words):
    status, shown = run(capsys, *SET, *arguments)
    assert status == 2
    assert any(word in shown.err.replace("\n", " ") for word in words.split("|")), shown.err
    assert "Traceback" not in shown.err


@pytest.mark.parametrize(
    ("rows", "words"),
    [
        ("0,1\n0.1,nan\n0.2,1\n", "row 3"),
        ("0,1\n0.1,\n0.2,1\n", "row 3"),
        ("0,1\n0.2,1\n0.1,1\n", "row 4"),
        ("0,1\n", "1 samples"),
        ("".join(f"{k},1\n" for k in range(100_001)), "2 to 100000 samples"),
    ],
)
def test_bad_files(capsys, tmp_path, rows, words):
    path = tmp_path / "samples.csv"
    path.write_text("time [s],voltage [V]\n" + rows, encoding="utf-8")
    status, shown = run(capsys, *SET, "--input", path)
    assert status == 2
    assert words in shown.err


def stated(folder, quantity, value, unit=""):
    """The demo with one more quantity of its axis."""
    case = folder / "case"
    shutil.copytree(DEMO / "tray_lift", case)
    shutil.copytree(DEMO / "catalog", folder / "catalog")
    with (case / "axis.csv").open("a", encoding="utf-8") as axis:
        axis.write(f"{quantity},{value},{unit},\n")
    return case


@pytest.mark.parametrize(
    ("quantity", "value", "unit"),
    [("driven shaft stiffness", "0", "Nm/rad"), ("driven shaft stiffness", "-5", "Nm/rad"),
     ("damping ratio", "nan", "-"), ("settling band", "0", "mm"), ("encoder counts per turn", "0", "-")],
)  # fmt: skip
def test_a_case_that_cannot_move_is_refused_by_its_cell(capsys, tmp_path, quantity, value, unit):
    status, shown = run(capsys, *SET, case=stated(tmp_path, quantity, value, unit))
    assert status == 2
    assert quantity in shown.err
    assert value in shown.err


def test_a_hold_longer_than_the_run_is_given_up_in_words(capsys, tmp_path):
    """A spring of 500 Hz over 30 years: millions of steps are made, not a million millions."""
    path = tmp_path / "samples.csv"
    path.write_text("time [s],voltage [V]\n0,1\n1e9,1\n", encoding="utf-8")
    status, shown = run(capsys, *SET, "--input", path)
    assert status == 0
    assert "given up at" in shown.out
    assert "ask for a shorter run" in shown.out
