"""What all tests share: a screen that is not there, reproducible random input, folders of their own."""

from __future__ import annotations

import os
import tempfile

# Before Qt, Matplotlib and NumPy are imported by anything.
os.environ.setdefault("QT_QPA_PLATFORM", "offscreen")
os.environ.setdefault("QT_API", "pyside6")
# Matrices are small here: a second thread of the linear algebra would wait for the first, at full speed, and take the
# core that another test runs on.
for _name in ("OPENBLAS_NUM_THREADS", "OMP_NUM_THREADS", "MKL_NUM_THREADS"):
    os.environ.setdefault(_name, "1")
for _name in ("XDG_CONFIG_HOME", "XDG_STATE_HOME", "XDG_DATA_HOME"):
    os.environ[_name] = tempfile.mkdtemp(prefix="coldward-tests-")

import hypothesis  # noqa: E402
import pytest  # noqa: E402

LONG = os.environ.get("COLDWARD_LONG") == "1"
"""Whether long campaigns run in full; otherwise one percent of them does."""

hypothesis.settings.register_profile("coldward", deadline=None, derandomize=True, print_blob=True)
hypothesis.settings.load_profile("coldward")


@pytest.fixture(scope="session")
def long() -> bool:
    """Whether long campaigns run in full."""
    return LONG
