"""Opening workbooks with python-calamine, whose panics neither print nor pass for something else."""

from __future__ import annotations

import io
import os
from collections.abc import Iterator
from contextlib import contextmanager, suppress

from python_calamine import CalamineWorkbook


class BulkError(Exception):
    """The library cannot read the file; the text is its own."""


@contextmanager
def bulk_workbook(content: bytes) -> Iterator[CalamineWorkbook]:
    """The workbook of these bytes. Raises BulkError for whatever the file makes the library raise.

    A panic of the Rust library is no Exception and cannot be imported by name; its message goes to the standard error
    of the process, which nobody should see, so that is turned off for the time.
    """
    try:
        with _without_stderr(), CalamineWorkbook.from_filelike(io.BytesIO(content)) as book:
            yield book
    except Exception as error:
        raise BulkError(str(error)) from error
    except BaseException as error:
        if type(error).__name__ != "PanicException":
            raise
        raise BulkError(str(error)) from error


@contextmanager
def _without_stderr() -> Iterator[None]:
    kept = -1
    with suppress(OSError):  # there may be no standard error
        kept = os.dup(2)
        nowhere = os.open(os.devnull, os.O_WRONLY)
        os.dup2(nowhere, 2)
        os.close(nowhere)
    try:
        yield
    finally:
        if kept >= 0:
            os.dup2(kept, 2)
            os.close(kept)
