"""Files of every version of the formats, kept as they were written then, go on being read.

``version-1.deskcase`` was made with one command of each kind, an undo, a redo and a revert; ``version-1.case.toml`` is
the exchange file of the same case. ``version-1-pencil`` is the like for scenarios and studies: before its last return,
it went through every command of the pencil, and one that is younger than the first file.
"""

from pathlib import Path

import msgspec
import pytest

from creditdesk.case.commands import Command
from creditdesk.case.exchange import read_case, write_case
from creditdesk.case.store import CaseFile
from creditdesk.case.trail import Kind, verify_replay
from creditdesk.case.wire import case_digest
from creditdesk.statements.chart import Chart

DATA = Path(__file__).parent.parent / "data"
DIGESTS = {
    "version-1": (
        "sha256:bcfaa94c23310b256888a864fd7220501a0ad44aaf10ded70a038d6ca5055071",
        "26204827eac11ec779643aed843b1ad36c79574039a59a427f9bfbe5c648ac45",
    ),
    "version-1-pencil": (
        "sha256:45aeab39bebd539d318d75e4554258ef38a08ecb73edcb7e6dd71fc6f47d2d4e",
        "66d600d22138c6dae5bac360db1c0878031715c8096d820c982144c38703876d",
    ),
}


@pytest.mark.parametrize("name", DIGESTS)
def test_a_case_file_of_each_version_opens_as_it_was(name: str) -> None:
    digest, head = DIGESTS[name]
    with CaseFile.open(DATA / f"{name}.deskcase", write=False) as file:
        assert file.findings == ()
        assert (case_digest(file.case), file.trail()[-1].hash) == (digest, head)
        assert verify_replay(file.trail()) == ()


def test_every_command_stands_in_a_file_that_is_kept() -> None:
    kept: set[str] = set()
    for name in DIGESTS:
        with CaseFile.open(DATA / f"{name}.deskcase", write=False) as file:
            kept |= {msgspec.json.decode(entry.payload)["edit"] for entry in file.trail() if entry.kind == Kind.EDIT}
    assert kept == {str(command.__struct_config__.tag) for command in Command.__args__}


@pytest.mark.parametrize("name", DIGESTS)
def test_an_exchange_file_of_each_version_reads_as_it_was(name: str, chart: Chart) -> None:
    data = (DATA / f"{name}.case.toml").read_bytes()
    case = read_case(data, chart, file=name)
    assert case_digest(case) == DIGESTS[name][0]
    assert write_case(case, chart) == data
