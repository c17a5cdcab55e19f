import subprocess
import sys

import pytest

import cornerwise


def test_public_names_are_frozen() -> None:
    assert sorted(cornerwise.__all__) == [
        "Assumptions", "Campaign", "CornerwiseError", "DataRefused", "Plan", "PlanRequest", "Result",
        "Survey", "TableOptions", "UsageError", "couple", "explain", "in_unit", "output_files", "plan",
        "plan_assumed", "read", "read_model", "read_result", "schemas", "simulate", "survey", "truth_of",
        "write_folder",
    ]  # fmt: skip
    for name in cornerwise.__all__:
        assert getattr(cornerwise, name) is not None


def test_unknown_name_is_an_attribute_error() -> None:
    with pytest.raises(AttributeError, match="no attribute 'uncouple'"):
        cornerwise.uncouple  # noqa: B018


def test_importing_costs_nothing_heavy() -> None:
    code = "import sys, cornerwise; print([m for m in ('numpy', 'pandas', 'scipy') if m in sys.modules])"
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"


def test_every_error_descends_from_the_base() -> None:
    from cornerwise import errors

    kinds = [c for c in vars(errors).values() if isinstance(c, type) and issubclass(c, Exception)]
    assert len(kinds) >= 3
    assert all(issubclass(kind, errors.CornerwiseError) for kind in kinds)
    assert {kind.exit_code for kind in kinds} == {1, 2, 3}
