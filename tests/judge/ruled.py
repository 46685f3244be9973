"""Rules about lengths for drawn drives."""

from random import Random

from reading import drive_of


def ruled(text: str, seed: int) -> str:
    """The drive with a rule of each kind, about switches, modes and lengths as they come."""
    drive, dice = drive_of(text), Random(seed)
    said = []
    for kind in ("on at most", "on at least", "off at least"):
        said.append(f"{dice.choice(drive.columns)} {kind} {dice.randint(1, 12)} ps")
    modes = list(drive.modes)
    if len(modes) > 1:
        first, second = dice.sample(modes, 2)
        said.append(f"{first} and {second} at least {dice.randint(1, 12)} ps apart")
    if drive.trips:
        trip, switch = dice.choice(drive.trips).name, dice.choice(drive.columns)
        said.append(f"{trip} clears {switch} within {dice.randint(1, 20)} ps")
    return text + "rules\n" + "".join(f"  {line}\n" for line in said)
