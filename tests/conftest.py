"""What holds for whole test files."""

from collections.abc import Iterator

import pytest

DATA_ONLY = {"test_run", "test_cluster", "test_trade"}
"""Files whose searches end with their data; what follows is tested in test_finish.py."""


@pytest.fixture(scope="module", autouse=True)
def _data_only(request: pytest.FixtureRequest) -> Iterator[None]:
    if request.path.stem not in DATA_ONLY:
        yield
        return
    with pytest.MonkeyPatch.context() as patch:
        patch.setattr("optim.finish.finish", lambda folder, _jobs=1: folder / "report.html")
        yield
