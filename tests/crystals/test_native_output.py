"""Lines that a C library writes to standard error are kept, and the descriptor is given back."""

import os
import sys

import pytest

from sitesym.crystals.native_output import native_output_kept


def test_what_is_written_to_the_descriptor_is_kept_and_not_shown(capfd):
    with native_output_kept() as lines:
        os.write(2, b"spglib: something failed\n\nand again\xff\n")
        assert lines == []
    os.write(2, b"shown again\n")
    assert lines == ["spglib: something failed", "and again\ufffd"]
    assert capfd.readouterr().err == "shown again\n"


def test_the_descriptor_is_given_back_after_an_error(capfd):
    kept = []

    def fail():
        with native_output_kept() as lines:
            kept.append(lines)
            os.write(2, b"before\n")
            raise ZeroDivisionError

    with pytest.raises(ZeroDivisionError):
        fail()
    sys.stderr.write("after\n")
    assert kept == [["before"]]
    assert capfd.readouterr().err == "after\n"


def test_no_descriptor_is_lost():
    before = len(os.listdir("/proc/self/fd")) if os.path.isdir("/proc/self/fd") else 0
    for _ in range(20):
        with native_output_kept():
            pass
    after = len(os.listdir("/proc/self/fd")) if os.path.isdir("/proc/self/fd") else 0
    assert after == before
