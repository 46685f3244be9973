"""The script for bash, 3.2 and later."""

from collections.abc import Iterable, Iterator

from seqcheck.completing.calls import Call, Offer

_HEAD = """\
# Completion of {program} for bash, made by '{program} completion bash'.
# In ~/.bashrc: source <({program} completion bash)

_{program}_wanted() {{  # what follows an option of a command, or stands at a place of it: kind and words
    wanted=
    case "$1 $2" in
"""
_BODY = """\
    esac
}}

_{program}() {{
    local IFS=$' \\t\\n' current=${{COMP_WORDS[COMP_CWORD]}} command= wanted= bare= place=0 number word
    [[ $current == "=" ]] && current=  # of '--as=json' bash makes three words
    for ((number = 1; number < COMP_CWORD; number++)); do
        word=${{COMP_WORDS[number]}}
        if [[ -n $wanted ]]; then
            [[ $word == "=" ]] || wanted=
        elif [[ -z $bare && $word == -- ]]; then
            bare=yes
        elif [[ -z $bare && $word == -?* ]]; then
            _{program}_wanted "$command" "$word"
        elif [[ -z $command ]]; then
            command=$word
        else
            place=$((place + 1))
        fi
    done
    if [[ -z $wanted && -z $bare && $current == -* ]]; then
        _{program}_wanted "$command" options
    elif [[ -z $wanted ]]; then
        _{program}_wanted "$command" "$place"
    fi
    COMPREPLY=()
    case $wanted in
        words\\ *)
            COMPREPLY=($(compgen -W "${{wanted#words }}" -- "$current"))
            ;;
        files\\ *)
            type compopt >/dev/null 2>&1 && compopt -o filenames 2>/dev/null
            while IFS= read -r word; do
                COMPREPLY+=("$word")
            done < <(
                compgen -d -- "$current"
                [[ $wanted == "files /" ]] || compgen -f -X "!${{wanted#files }}" -- "$current" |
                    while IFS= read -r word; do [[ -d $word ]] || printf '%s\\n' "$word"; done
            )
            ;;
    esac
}}

complete -F _{program} {program}
"""


def script(call: Call) -> str:
    """The whole script."""
    cases = "".join(f"        {pattern}) wanted='{kind}' ;;\n" for pattern, kind in _table(call))
    return _HEAD.format(program=call.program) + cases + _BODY.format(program=call.program)


def _table(call: Call) -> Iterator[tuple[str, str]]:
    """What may follow, for every `COMMAND WORD` or `COMMAND PLACE`: a pattern of `case`, and the kind."""
    yield '" options"', _words(one.flag for one in call.options)
    yield '" 0"', _words(one.name for one in call.commands)
    for command in call.commands:
        flags = _words(one.flag for one in command.options)
        yield f'"{command.name} options"', flags
        for option in command.options:
            if option.value is not None:
                yield f'"{command.name} {option.flag}"', _kind(option.value)
        for number, place in enumerate(command.places):
            yield f'"{command.name} {number}"', _kind(place)
        if command.repeats:
            yield f'"{command.name} "[0-9]*', _kind(command.places[-1])
        elif not command.places:
            yield f'"{command.name} 0"', flags


def _kind(offer: Offer) -> str:
    return f"files {offer.files}" if offer.files else _words(offer.words)


def _words(words: Iterable[str]) -> str:
    return f"words {' '.join(words)}"
