"""What the command prints: data to stdout, everything else to stderr, whoever has closed either of them."""

from __future__ import annotations

import os
import sys
from collections.abc import Iterable, Sequence
from contextlib import suppress
from typing import TYPE_CHECKING, Any

import click

from tautwise.strict import inert

if TYPE_CHECKING:
    from tautwise.records import Record


class NoOutput(Exception):
    """What a command prints cannot be written."""


def tell(lines: Iterable[str]) -> None:
    """Print to stderr, a line each; nobody is left to tell where that is closed."""
    with suppress(OSError, ValueError):
        for line in lines:
            for part in line.splitlines():
                click.echo(inert(part), err=True)


def print_text(text: str) -> None:
    """Print to stdout; a reader who has closed the pipe has seen enough, and the exit code stays what it is."""
    if sys.stdout is None:
        raise NoOutput("there is no standard output")
    try:
        sys.stdout.write(text)
    except BrokenPipeError:
        silence_stdout()
    except OSError as error:
        raise NoOutput(error.strerror) from None


def flushed(code: int) -> int:
    """An exit code, once everything printed has gone out."""
    try:
        if sys.stdout is not None:
            sys.stdout.flush()
    except BrokenPipeError:
        silence_stdout()
    except OSError as error:
        raise NoOutput(error.strerror) from None
    return code


def print_texts(texts: Iterable[list[str]]) -> None:
    """Print answers in words, a blank line between them."""
    from tautwise.text import joined

    print_text("\n".join(joined(lines) for lines in texts))


def print_documents(records: Sequence[Record], *, many: bool = False) -> None:
    """One document, or a list of them where several files were given; nothing where there is no answer."""
    documents = [record.to_dict() for record in records]
    if many or documents:
        print_json(documents if many else documents[0])


def print_json(document: Any) -> None:
    """Print a document as JSON, for people too."""
    from tautwise.records import readable_json

    print_text(readable_json(document) + "\n")


def silence_stdout() -> None:
    """Let the exit not stumble over what cannot be written any more."""
    if sys.stdout is None:
        return
    try:
        os.dup2(os.open(os.devnull, os.O_WRONLY), sys.stdout.fileno())
    except (OSError, ValueError):
        sys.stdout = None
