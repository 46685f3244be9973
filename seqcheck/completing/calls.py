"""What may stand in a call, as data, read off the parser of the command line so that it cannot go stale."""

import argparse
from collections.abc import Iterator, Mapping
from dataclasses import dataclass

DRIVES, EVIDENCE, ANY_FILE, FOLDERS = "*.dseq", "*.json", "*", "/"
"""The files that a value can be: patterns that folders always go with, or folders alone."""

_FILES = {"PATH": DRIVES, "FILE": DRIVES, "OLD": DRIVES, "NEW": DRIVES, "EVIDENCE": EVIDENCE, "DIR": FOLDERS}
FREE = frozenset({"ADDRESS", "N", "DURATION", "D", "NAME"})
"""What stands for values that nobody can guess; nothing is offered for them."""


@dataclass(frozen=True, slots=True)
class Offer:
    """What a value can be: one of `words`, or files of a pattern, or free. `name` is what the help calls it."""

    name: str
    words: tuple[str, ...] = ()
    files: str = ""


@dataclass(frozen=True, slots=True)
class Option:
    """An option with its help on one line; `value` is what must follow it, if anything. Some may be said `again`."""

    flag: str
    about: str
    value: Offer | None
    again: bool


@dataclass(frozen=True, slots=True)
class Command:
    """A command: its options, and what stands beside them, in order; the last of these again and again if `repeats`."""

    name: str
    about: str
    options: tuple[Option, ...]
    places: tuple[Offer, ...]
    repeats: bool


@dataclass(frozen=True, slots=True)
class Call:
    """All that may be called: the program, its own options, its commands."""

    program: str
    options: tuple[Option, ...]
    commands: tuple[Command, ...]


def call_of(parser: argparse.ArgumentParser, known: Mapping[str, tuple[str, ...]]) -> Call:
    """What a parser takes. `known` are the values of a metavar, or of `COMMAND METAVAR` where commands differ.

    Raises LookupError where a value is neither known, nor a file, nor free: what is new must say which it is.
    """
    commands = tuple(
        _command(name, about, own, known)
        for action in parser._actions  # argparse has no other way to ask what it takes
        if isinstance(action, argparse._SubParsersAction)
        for name, about, own in _named(action)
    )
    return Call(parser.prog, tuple(_options("", parser, known)), commands)


def _named(
    action: "argparse._SubParsersAction[argparse.ArgumentParser]",
) -> Iterator[tuple[str, str, argparse.ArgumentParser]]:
    about = {one.dest: one.help or "" for one in action._choices_actions}
    yield from ((name, about.get(name, ""), own) for name, own in action.choices.items())


def _command(name: str, about: str, parser: argparse.ArgumentParser, known: Mapping[str, tuple[str, ...]]) -> Command:
    standing = [one for one in parser._actions if not one.option_strings]
    places = tuple(_offer(name, one, known) for one in standing)
    return Command(
        name, about, tuple(_options(name, parser, known)), places, any(one.nargs in ("*", "+") for one in standing)
    )


def _options(command: str, parser: argparse.ArgumentParser, known: Mapping[str, tuple[str, ...]]) -> Iterator[Option]:
    for action in parser._actions:
        if action.option_strings and action.help is not argparse.SUPPRESS:
            value = None if action.nargs == 0 else _offer(command, action, known)
            again = isinstance(action.default, list)  # what is said again is added to a list
            yield Option(action.option_strings[-1], " ".join((action.help or "").split()), value, again)


def _offer(command: str, action: argparse.Action, known: Mapping[str, tuple[str, ...]]) -> Offer:
    name = str(action.metavar or action.dest)
    words = known.get(f"{command} {name}", known.get(name))
    if words is not None:
        return Offer(name, words)
    if name in _FILES:
        return Offer(name, files=ANY_FILE if name == "FILE" and action.option_strings else _FILES[name])
    if name in FREE:
        return Offer(name)
    raise LookupError(f"{command}: {name} needs its words, its files, or a place in completing.calls.FREE")
