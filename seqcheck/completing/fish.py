"""The script for fish, 3 and later."""

from collections.abc import Iterator

from seqcheck.completing.calls import ANY_FILE, FOLDERS, Call, Command, Offer, Option

_HEAD = """\
# Completion of {program} for fish, made by '{program} completion fish'.
# {program} completion fish > ~/.config/fish/completions/{program}.fish

function __{program}_at  # whether the cursor is at a place: COMMAND, and the number of words beside options before it
    set -l command ''
    set -l place 0
    set -l words (commandline -opc)[2..-1]
    set -l skip no
    set -l bare no
    for word in $words
        if test $skip = yes
            set skip no
        else if test $bare = no -a "$word" = --
            set bare yes
        else if test $bare = no; and string match -q -- '-?*' $word
            contains -- "$command $word" {valued}
            and set skip yes
        else if test -z "$command"
            set command $word
        else
            set place (math $place + 1)
        end
    end
    test "$command" = "$argv[1]"; or return 1
    test (count $argv) -eq 1; and return 0
    test $place -ge $argv[2] -a $place -le $argv[3]
end

function __{program}_files  # files of a suffix, and folders
    set -l token (commandline -ct)
    for name in $token*
        if test -d $name
            echo $name/
        else if string match -q -- "*$argv[1]" $name
            echo $name
        end
    end
end

complete -c {program} -f
"""
_MANY = 999


def script(call: Call) -> str:
    """The whole script."""
    valued = " ".join(
        _quoted(f"{command.name} {option.flag}")
        for command in call.commands
        for option in command.options
        if option.value
    )
    return _HEAD.format(program=call.program, valued=valued) + "".join(f"{one}\n" for one in _lines(call))


def _lines(call: Call) -> Iterator[str]:
    start = f"complete -c {call.program}"
    for option in call.options:
        yield f"{start} -n '__{call.program}_at \"\"'{_option(call, option)}"
    for command in call.commands:
        about = f" -a {command.name} -d {_quoted(command.about)}"
        yield f"{start} -n '__{call.program}_at \"\" 0 0'{about}"
    for command in call.commands:
        for option in command.options:
            yield f"{start} -n '__{call.program}_at {command.name}'{_option(call, option)}"
        yield from (f"{start} {one}" for one in _places(call, command))


def _places(call: Call, command: Command) -> Iterator[str]:
    for number, place in enumerate(command.places):
        last = _MANY if command.repeats and number == len(command.places) - 1 else number
        yield f"-n '__{call.program}_at {command.name} {number} {last}'{_value(call, place)}"


def _option(call: Call, option: Option) -> str:
    value = f" -x{_value(call, option.value)}" if option.value else ""
    if option.value and option.value.files == ANY_FILE:
        value = " -r -F"
    return f" -l {option.flag.removeprefix('--')} -d {_quoted(option.about)}{value}"


def _value(call: Call, offer: Offer) -> str:
    if offer.files == FOLDERS:
        return " -a '(__fish_complete_directories (commandline -ct))'"
    if offer.files == ANY_FILE:
        return " -F"
    if offer.files:
        return f" -a '(__{call.program}_files {offer.files.removeprefix('*')})'"
    return f" -a '{' '.join(offer.words)}'" if offer.words else ""


def _quoted(text: str) -> str:
    return "'" + text.replace("\\", "\\\\").replace("'", "\\'") + "'"
