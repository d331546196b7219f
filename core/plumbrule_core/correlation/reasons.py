"""Why a space was proposed, and what one group more or less would change, in words."""

from collections.abc import Sequence

from plumbrule_core.correlation.cuts import Cut, edges, kept
from plumbrule_core.correlation.profile import Profile


def calm_reason(profile: Profile) -> str:
    """Why no space is proposed."""
    if not len(profile.entropies):
        return "There is nothing to correlate in this window."
    return (
        f"One determinant describes it: no orbital has an entropy above {profile.largest:.2f} "
        f"(the most it can be is 1.39), and the reference keeps {100 * profile.c0_squared:.0f} % of the "
        "weight."
    )


def reason(profile: Profile, cuts: Sequence[Cut], place: int, step: bool) -> str:
    """Why this cut was taken out of all, and what its neighbours would be."""
    members = cuts[place].members
    weakest, strongest = edges(profile, members)
    lead = "There is a step" if step else "No step stands out; the best place to cut is"
    said = [f"{lead} after {numbers(profile, members)}: the weakest of them has an entropy of {weakest:.2f}"]
    said[0] += (
        f", the strongest outside {strongest:.2f}." if strongest > 0 else ", and nothing is left outside."
    )
    said.append(f"They hold {100 * kept(profile, members):.0f} % of all mutual information.")
    if place > 0:
        less = [k for k in members if k not in cuts[place - 1].members]
        said.append(f"One group less would leave out {numbers(profile, less)} ({_range(profile, less)}).")
    if place + 1 < len(cuts):
        more = [k for k in cuts[place + 1].members if k not in members]
        said.append(f"One group more would add {numbers(profile, more)} ({_range(profile, more)}).")
    return " ".join(said)


def numbers(profile: Profile, members: Sequence[int]) -> str:
    """`orbitals 5 to 10 and 14`."""
    return number_words([profile.orbitals[k] for k in members])


def number_words(found: Sequence[int]) -> str:
    """`orbitals 5 to 10 and 14`."""
    runs: list[list[int]] = []
    for number in sorted(found):
        if runs and number == runs[-1][-1] + 1:
            runs[-1].append(number)
        else:
            runs.append([number])
    words: list[str] = []
    for run in runs:
        words += [f"{run[0]} to {run[-1]}"] if len(run) > 2 else map(str, run)
    text = words[0] if len(words) == 1 else f"{', '.join(words[:-1])} and {words[-1]}"
    return f"orbital{'s' if len(found) > 1 else ''} {text}"


def _range(profile: Profile, members: Sequence[int]) -> str:
    values = [profile.entropies[k] for k in members]
    low, high = min(values), max(values)
    return f"entropy {high:.2f}" if high - low < 0.005 else f"entropies {low:.2f} to {high:.2f}"
