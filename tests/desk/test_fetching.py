"""In processes of their own: what is spared by the collector cannot be given back one by one."""

from tests.programs import run_python

FETCH = """
import gc, sys
from creditdesk.desk.fetching import fetching
kept = gc.get_freeze_count()
with fetching():
    assert not gc.isenabled()
    import {module}
assert gc.isenabled()
print(gc.get_freeze_count() - kept)
"""
FAIL = """
import gc
from creditdesk.desk.fetching import fetching
try:
    with fetching():
        import no_such_module
except ImportError:
    print(gc.isenabled())
"""


def _spared(module: str) -> int:
    done = run_python("-c", FETCH.format(module=module))
    assert (done.code, done.messages) == (0, ())
    return int(done.text)


def test_many_modules_are_spared_and_a_few_are_not() -> None:
    assert _spared("matplotlib.figure") > 10_000
    assert _spared("json") == 0


def test_what_cannot_be_fetched_leaves_the_collector_at_work() -> None:
    assert run_python("-c", FAIL).text.strip() == "True"
