import sys
from pathlib import Path

import pytest

sys.path.insert(0, str(Path(__file__).parent))

from closed_form_store import closed_form_store

from workbench.views.derived.index import run_index


@pytest.fixture
def store():
    return closed_form_store()


@pytest.fixture
def index(store):
    return run_index(store)
