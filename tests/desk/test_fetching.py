"""In processes of their own: what is spared by the collector cannot be given back one by one."""

import json  # noqa: F401  is to be in memory
import threading
import time

from creditdesk.desk.fetching import fetch, fetching
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


def test_threads_that_fetch_take_turns() -> None:
    """Where one began with a package and the other with a part of it, each could wait for the other."""
    inside, most = threading.Semaphore(1), []

    def work() -> None:
        with fetching():
            most.append(inside.acquire(blocking=False))
            time.sleep(0.1)
            inside.release()

    threads = [threading.Thread(target=work) for _ in range(3)]
    for one in threads:
        one.start()
    for one in threads:
        one.join()
    assert most == [True] * 3


def test_what_is_in_memory_waits_for_nobody() -> None:
    with fetching():
        done = threading.Thread(target=fetch, args=("json",))
        done.start()
        done.join(10)
        assert not done.is_alive()


CLOSED = """
import gc, weakref
from creditdesk.desk.fetching import let_closed_go
class Thing:
    pass
one, other = Thing(), Thing()
one.other, other.one, kept = other, one, weakref.ref(one)
gc.freeze()
del one, other
gc.collect()
assert kept() is not None
let_closed_go()
print(kept() is None, gc.get_freeze_count() > 1000)
"""


def test_what_was_spared_and_is_closed_since_is_let_go() -> None:
    assert run_python("-c", CLOSED).text.strip() == "True True"
