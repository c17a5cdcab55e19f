"""Whether structures can be read: by gemmi, an optional library that has to be there under CORNERWISE_CI."""

import os
from importlib.util import find_spec

import pytest

MISSING = find_spec("gemmi") is None and os.environ.get("CORNERWISE_CI") != "1"
needs_gemmi = pytest.mark.skipif(
    MISSING, reason="no structure is read: no gemmi, the optional extra structure"
)
