import os

import pytest

from evidence.laboratory import Laboratory


@pytest.fixture(autouse=True)
def quick_disk(monkeypatch):
    """Whether bytes outlive a power cut cannot be seen by a test, only the order of the calls can."""
    monkeypatch.setattr(os, "fsync", lambda _descriptor: None)


@pytest.fixture
def laboratory(tmp_path):
    laboratory = Laboratory(tmp_path / "runs")
    laboratory.found()
    return laboratory
