"""Files of every version of the formats, kept as they were written then, go on being read.

``version-1.deskcase`` was made with one command of each kind, an undo, a redo and a revert; ``version-1.case.toml`` is
the exchange file of the same case.
"""

from pathlib import Path

import pytest

from creditdesk.case.exchange import read_case, write_case
from creditdesk.case.store import CaseFile
from creditdesk.case.trail import verify_replay
from creditdesk.case.wire import case_digest
from creditdesk.statements.chart import Chart

DATA = Path(__file__).parent.parent / "data"
DIGESTS = {
    "version-1": (
        "sha256:bcfaa94c23310b256888a864fd7220501a0ad44aaf10ded70a038d6ca5055071",
        "26204827eac11ec779643aed843b1ad36c79574039a59a427f9bfbe5c648ac45",
    )
}


@pytest.mark.parametrize("name", DIGESTS)
def test_a_case_file_of_each_version_opens_as_it_was(name: str) -> None:
    digest, head = DIGESTS[name]
    with CaseFile.open(DATA / f"{name}.deskcase", write=False) as file:
        assert file.findings == ()
        assert (case_digest(file.case), file.trail()[-1].hash) == (digest, head)
        assert verify_replay(file.trail()) == ()


@pytest.mark.parametrize("name", DIGESTS)
def test_an_exchange_file_of_each_version_reads_as_it_was(name: str, chart: Chart) -> None:
    data = (DATA / f"{name}.case.toml").read_bytes()
    case = read_case(data, chart, file=name)
    assert case_digest(case) == DIGESTS[name][0]
    assert write_case(case, chart) == data
