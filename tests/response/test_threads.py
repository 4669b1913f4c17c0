"""The response's linear algebra keeps to one thread, and gives the threads back."""

from __future__ import annotations

import pytest
from threadpoolctl import threadpool_info

from layoutgen.response.threads import one_thread


def threads() -> list[int]:
    return [pool["num_threads"] for pool in threadpool_info() if pool["user_api"] == "blas"]


def test_one_thread_within_and_as_before_afterwards(monkeypatch: pytest.MonkeyPatch) -> None:
    """Several threads on small matrices are many times slower; a caller's own setting must come back."""
    monkeypatch.delenv("OPENBLAS_NUM_THREADS", raising=False)
    before = threads()
    assert before

    @one_thread()
    def within() -> list[int]:
        return threads()

    assert set(within()) == {1}
    assert threads() == before
    with pytest.raises(ZeroDivisionError), one_thread():
        raise ZeroDivisionError
    assert threads() == before
