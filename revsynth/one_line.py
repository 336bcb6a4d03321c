"""Text from files and command lines, made fit for one line of a terminal or a comment."""

from __future__ import annotations


def one_line(text: str) -> str:
    """The text in printable characters: white space becomes blanks, what cannot be shown `?`."""
    return "".join(
        character if character.isprintable() else " " if character.isspace() else "?" for character in text
    )
