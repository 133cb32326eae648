"""Keeping the collector of cyclic garbage out of the way while very many values are made at once."""

import gc
from collections.abc import Iterator
from contextlib import contextmanager


@contextmanager
def collector_paused() -> Iterator[None]:
    """Collect no cyclic garbage within the block.

    A hundred thousand entries hold none, and to look through them again and again takes longer than reading.
    """
    active = gc.isenabled()
    gc.disable()
    try:
        yield
    finally:
        if active:
            gc.enable()
