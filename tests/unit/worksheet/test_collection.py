"""Putting off garbage collection."""

from __future__ import annotations

import gc
import weakref

import pytest

import eqsheet
from eqsheet.worksheet.collection import CollectionPutOff


def test_is_off_inside_and_on_again_afterwards() -> None:
    assert gc.isenabled()
    with CollectionPutOff():
        assert not gc.isenabled()
        with CollectionPutOff():
            assert not gc.isenabled()
        assert not gc.isenabled()
    assert gc.isenabled()


def test_is_on_again_after_an_exception() -> None:
    with pytest.raises(ZeroDivisionError), CollectionPutOff():
        _ = 1 / 0
    assert gc.isenabled()


def test_stays_off_where_the_caller_has_switched_it_off() -> None:
    gc.disable()
    try:
        eqsheet.parse("x = 2 m\ny = 3*x").solve()
        assert not gc.isenabled()
    finally:
        gc.enable()


def test_what_was_made_is_collected_all_the_same() -> None:
    class Node:
        other: object = None

    with CollectionPutOff():
        node = Node()
        node.other = node
    gone = weakref.ref(node)
    del node
    gc.collect()
    assert gone() is None


def test_what_the_caller_has_frozen_stays_frozen() -> None:
    gc.freeze()
    try:
        frozen = gc.get_freeze_count()
        with CollectionPutOff():
            pass
        assert gc.get_freeze_count() >= frozen - 1
    finally:
        gc.unfreeze()
