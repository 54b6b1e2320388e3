"""The cache gives back what was put, and is never in the way."""

from __future__ import annotations

import os
import time

import pytest

from behavgen.errors import ProjectError
from behavgen.regress.cache import ResultCache

KEY = "ab" + 62 * "0"
FILES = {"a.json": b'{"x": 1}\n', "check/run.log": bytes(range(256)), "empty": b""}


@pytest.fixture
def cache(tmp_path):
    return ResultCache(folder=tmp_path / "cache")


def entry_of(cache):
    (entry,) = cache.folder.glob("*/*.entry")
    return entry


def test_what_was_put_comes_back(cache):
    assert cache.get(KEY) is None
    cache.put(KEY, FILES)
    assert cache.get(KEY) == FILES
    assert cache.get("ab" + 62 * "1") is None


def test_the_same_files_give_the_same_bytes(cache, tmp_path):
    cache.put(KEY, FILES)
    again = ResultCache(folder=tmp_path / "again")
    time.sleep(0.01)
    again.put(KEY, dict(reversed(FILES.items())))
    assert entry_of(cache).read_bytes() == entry_of(again).read_bytes()


@pytest.mark.parametrize("keep", [0, 10, 60])
def test_a_cut_entry_is_not_there(cache, keep):
    cache.put(KEY, FILES)
    entry_of(cache).write_bytes(entry_of(cache).read_bytes()[:keep])
    assert cache.get(KEY) is None


def test_an_entry_with_a_flipped_bit_is_not_there(cache):
    cache.put(KEY, FILES)
    whole = entry_of(cache).read_bytes()
    for place in range(len(whole)):
        damaged = bytearray(whole)
        damaged[place] ^= 0x10
        entry_of(cache).write_bytes(damaged)
        assert cache.get(KEY) is None


def test_pruning_takes_what_nobody_asked_for(cache):
    other = "cd" + 62 * "0"
    cache.put(KEY, FILES)
    cache.put(other, FILES)
    for entry in cache.folder.glob("*/*.entry"):
        os.utime(entry, (1e9, 1e9))
    assert cache.get(KEY) == FILES  # asked for now
    assert cache.prune(3600.0) == 1
    assert cache.get(other) is None
    assert cache.get(KEY) == FILES


def test_a_folder_that_cannot_be_written_is_told(tmp_path):
    (tmp_path / "cache").write_text("a file")
    with pytest.raises(ProjectError, match="cannot be written"):
        ResultCache(folder=tmp_path / "cache").put(KEY, FILES)
