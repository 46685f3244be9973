"""What each check asks, for forms that describe what they name: one table."""

from dataclasses import dataclass

from seqcheck.reports.remarks import FAULT, UNDECIDED, WRONG_INPUT
from seqcheck.verdict import Check


@dataclass(frozen=True, slots=True)
class About:
    """`name` in a few words, `says` what a finding of it means, `help` what to do; sentences."""

    name: str
    says: str
    help: str


ABOUT: dict[str, About] = {
    Check.SHORT.value: About(
        "A mode commands a short",
        "In a mode, all switches of a set that joins the nodes of a supply are commanded on at once.",
        "No wait cures it: in the row of the switching table leave one of the switches off.",
    ),
    Check.OVERLAP.value: About(
        "Switches overlap in passing",
        "In some run that the file allows, all switches of a set that joins the nodes of a supply can conduct at the"
        " same time, although no mode commands that.",
        "Make the wait, the dead time or the spacing of the writes longer by the overlap, or order the writes so that"
        " what must be off is off first. Where a length was proven to cure it, the finding names it.",
    ),
    Check.THIN_MARGIN.value: About(
        "Less margin than asked for",
        "The dead time left of a pair of switches that could short is at worst less than the file asks for.",
        "Make the wait, the dead time or the spacing longer, or ask for less margin.",
    ),
    Check.OPEN_WINDING.value: About(
        "A winding's current has no way",
        "In some run the current of a winding that must flow finds no closed way through the stage.",
        "Turn the next way on before the last one is turned off, or add a diode or clamp that takes the current.",
    ),
    Check.TOGETHER.value: About(
        "A forbidden combination is possible",
        "In some run what a 'never' rule of the file forbids is so at the same time.",
        "Change the row or the order and spacing of the writes that lead to it, or the rule if it asks too much.",
    ),
    Check.LATE_TRIP.value: About(
        "A trip clears too late",
        "After a trip some switch that it must clear can still conduct when the time of the rule is over.",
        "Shorten the trip's steps or its 'within', or allow it more time.",
    ),
    Check.LONG_ON.value: About(
        "On for too long",
        "A switch can be commanded on without a break for longer than the rule allows.",
        "Bound the stay in the modes that command it on, or put it on a carrier.",
    ),
    Check.SHORT_PULSE.value: About(
        "A pulse is too short",
        "A switch can be commanded on or off for a shorter time than the rule asks for.",
        "Wait before the command is changed back, or narrow the duty of its carrier.",
    ),
    Check.TOO_SOON.value: About(
        "Modes follow too soon",
        "From leaving the one mode to entering the other less time can pass than the rule asks for.",
        "Make the wait between them longer, or let them begin later.",
    ),
    Check.SINGLE_FAULT.value: About(
        "A single fault shorts",
        "With one thing stuck, a switch or a pin, a short comes at rest in a mode for which the file says that it"
        " tolerates single faults.",
        "Turn off in this mode what conducts beside the stuck switch, and let it be through with its turn-off before"
        " the mode is entered, or put a second switch in series.",
    ),
    Check.UNREACHABLE.value: About(
        "A mode is never entered",
        "No sequence of moves and trips leads from the start to this mode.",
        "Add the move that leads to it, or take its row out.",
    ),
    Check.NO_WAY_BACK.value: About(
        "A mode is never left",
        "From this mode no move and no trip leads back to the mode in which the drive starts.",
        "Add a move or a trip that leads out of it.",
    ),
    Check.AMBIGUOUS.value: About(
        "Two moves hear the same event",
        "Out of one mode two moves begin on the same event, so the file does not say which is taken.",
        "Give them different events, or make them one move.",
    ),
    Check.STALLED.value: About(
        "A timed move can never fire",
        "The mode is always left before the time of this move has come.",
        "Shorten its time, or take the move out.",
    ),
    Check.ROW_MEANING.value: About(
        "A row does not do what it is for",
        "What the row's commands do to the winding is not what its 'means' says.",
        "Correct the cells of the row, or what it means.",
    ),
    Check.IDLE_WAIVER.value: About(
        "A waiver lets nothing pass",
        "No finding of this check names what the waiver is for.",
        "Take the waiver out, so that it does not hide what comes later.",
    ),
    Check.NO_PATH.value: About(
        "A switch has no delays",
        "The switch has no path, so its delays are taken as zero.",
        "Give it a line in 'paths' with the parts between its pin and its conduction.",
    ),
    Check.HELD_BY_INTERLOCK.value: About(
        "Only the interlock prevents a short",
        "The firmware alone would bring the switches together, or whether it would is undecided; the driver's"
        " interlock keeps them apart.",
        "Leave dead time in the sequence as well, so that the interlock is the second barrier and not the only one.",
    ),
    Check.PUNCTUAL.value: About(
        "The proof rests on punctual firmware",
        "The hazard is proven impossible only for firmware that keeps its upper bounds, and the file does not say how"
        " late it can be.",
        "Say it on the clock's line: 'clock ..., late by at most ...'.",
    ),
    UNDECIDED: About(
        "A hazard is undecided",
        "A limit was reached before the hazard was proven impossible or a run was found. It is not proven.",
        "Raise or drop the limit (--most-zones, --give-up-after), or make the drive simpler. Never take it for proven.",
    ),
    WRONG_INPUT: About(
        "The file cannot be judged",
        "The file breaks a rule of the language or asks for what cannot be proven, so nothing of it was judged.",
        "Correct the line as the message says.",
    ),
    FAULT: About(
        "The program failed",
        "The program itself is at fault, so nothing that it found about the file may be believed.",
        "Report it with the file.",
    ),
}
"""For every check and for what stands in place of one, by name."""
