"""The script for zsh, 5 and later, by its own `_arguments`; it may be sourced, or lie in the function path."""

from seqcheck.completing.calls import FOLDERS, Call, Command, Offer, Option

_SCRIPT = """\
#compdef {program}
# Completion of {program} for zsh, made by '{program} completion zsh'.
# In ~/.zshrc, after compinit: source <({program} completion zsh)

_{program}() {{
    local curcontext="$curcontext" state line
    typeset -A opt_args
    _arguments -C {options} '1:command:->command' '*::argument:->argument'
    case $state in
        command)
            local -a commands=({commands})
            _describe command commands
            ;;
        argument)
            case $line[1] in
{cases}            esac
            ;;
    esac
}}

if [[ $funcstack[1] == _{program} ]]; then
    _{program} "$@"
else
    compdef _{program} {program}
fi
"""


def script(call: Call) -> str:
    """The whole script."""
    options = " ".join(_option(one) for one in call.options)
    commands = " ".join(_quoted(f"{_escaped(one.name)}:{_escaped(one.about)}") for one in call.commands)
    cases = "".join(f"                {one.name}) _arguments -S {_specs(one)} ;;\n" for one in call.commands)
    return _SCRIPT.format(program=call.program, options=options, commands=commands, cases=cases)


def _specs(command: Command) -> str:
    places = [f"{number}:{_value(one)}" for number, one in enumerate(command.places, 1)]
    if command.repeats:
        places[-1] = f"*:{_value(command.places[-1])}"
    return " ".join([*map(_option, command.options), *map(_quoted, places)])


def _option(option: Option) -> str:
    """An option; one without a value that ends the call shuts out all others."""
    lead = "(- *)" if option.flag in ("--help", "--version") else "*" if option.again else ""
    value = f":{_value(option.value)}" if option.value else ""
    mark = "=" if option.value else ""
    return _quoted(f"{lead}{option.flag}{mark}[{_escaped(option.about)}]{value}")


def _value(offer: Offer) -> str:
    """What a value is called, and what it can be."""
    if offer.files == FOLDERS:
        return f"{offer.name}:_files -/"
    if offer.files:
        return f'{offer.name}:_files -g "{offer.files}(-.)"'
    return f"{offer.name}:({' '.join(offer.words)})" if offer.words else f"{offer.name}: "


def _escaped(text: str) -> str:
    return "".join(f"\\{one}" if one in "\\:[]" else one for one in text)


def _quoted(text: str) -> str:
    return "'" + text.replace("'", "'\\''") + "'"
