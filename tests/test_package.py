"""The package as a whole: what importing it costs, and what its names are."""

import subprocess
import sys

import pytest

import dualize


def fresh(code):
    return subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True).stdout


def test_importing_the_package_imports_no_library():
    code = "import sys, dualize; print(*sorted({'numpy', 'numba', 'scipy', 'click'} & set(sys.modules)))"
    assert fresh(code).split() == []


@pytest.mark.parametrize("name", ["audit", "build", "export", "match", "plan"])
def test_a_function_stays_one_whatever_is_imported_first(name):
    assert fresh(f"import dualize.{name}; print(callable(dualize.{name}))") == "True\n"


@pytest.mark.parametrize("name", dualize.__all__)
def test_every_public_name_can_be_had(name):
    assert getattr(dualize, name) is not None
    assert name in dir(dualize)


def test_an_unknown_name_is_an_attribute_error():
    with pytest.raises(AttributeError, match="has no attribute 'unknown'"):
        dualize.unknown  # noqa: B018
