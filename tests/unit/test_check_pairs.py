"""Every check has a case in which it alone fails, and one in which its data is missing."""

import numpy as np
import pytest

from actuator_sizing.case.judging import default_limits
from actuator_sizing.sizing.checks import CHECKS
from actuator_sizing.sizing.judging import check_results, judge_sets
from actuator_sizing.sizing.results import NOT_CHECKED
from tests.check_cases import FAILING, IMPLIED, LACKING, sets_of

LIMITS = default_limits()


def results_of(sets):
    verdicts = judge_sets(sets, CHECKS, tuple(LIMITS[check.key] for check in CHECKS))
    return {r.check: r for r in check_results(sets, verdicts, 0)}


def test_no_check_is_without_its_pair():
    keys = {check.key for check in CHECKS}
    assert keys - set(FAILING) == set(), "add a case to FAILING of tests/check_cases.py"
    needy = {check.key for check in CHECKS if check.needs}
    assert needy - set(LACKING) == set(), "add a case to LACKING of tests/check_cases.py"


def test_the_comfortable_axis_passes_all_it_is_asked():
    for result in results_of(sets_of()).values():
        assert result.utilisation is not None, result.check
        assert result.utilisation <= result.allowed, result.check


@pytest.mark.parametrize("check", CHECKS, ids=lambda check: check.key)
def test_it_alone_fails(check):
    results = results_of(FAILING[check.key]())
    beyond = {key for key, r in results.items() if r.utilisation is not None and r.utilisation > r.allowed}
    assert beyond - IMPLIED.get(check.key, set()) == {check.key}
    found = results[check.key]
    assert found.working
    assert found.formula
    assert found.source
    assert np.isfinite(found.utilisation)
    assert found.utilisation == pytest.approx(found.demand / found.capacity, rel=1e-12)


@pytest.mark.parametrize("check", [c for c in CHECKS if c.needs], ids=lambda check: check.key)
def test_missing_data_is_asked_for_and_never_passes(check):
    lacking, datum = LACKING[check.key]
    found = results_of(lacking())[check.key]
    assert found.verdict == NOT_CHECKED
    assert found.utilisation is None
    assert found.demand is None
    assert datum in found.missing
