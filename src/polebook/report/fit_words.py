"""What `polebook fit` says in words: what the sweep can't tell, and what becomes of the file."""

from __future__ import annotations

from collections.abc import Iterator

from polebook.report import figures as show
from polebook.report.document import Entry
from polebook.report.spread_words import listed

_FEW = 4  # pairs of keys that are told
_LEVEL = 0.7  # of what is left of the gain, its mean, from which a level that is off is told


def head(one: Entry) -> str:
    """What was free, and who said so."""
    count = len(one["fitted"])
    who = ": the strays of all stages, for none were chosen" if one["free"]["from"] == "strays" else ", as chosen"
    offset = ", and the level of the measured gain" if one["free"]["offset"] else ""
    return f"{count} key{'s' * (count != 1)} may change{who}{offset}"


def sentences(one: Entry) -> Iterator[tuple[str, str]]:
    """(sentence, style): what is not determined and why, what goes together, and whether what is left is noise."""
    for group in one["together"]:
        yield _together(group), "warn"
    yield from _lone(one)
    for pair in one["pairs"][:_FEW]:
        a, b = pair["keys"]
        way = "more of the one with less of the other" if pair["correlation"] < 0 else "more of both"
        yield (f"{a} and {b} go together (correlation {pair['correlation']:+.3f}): {way} changes the curve little, so "
               "that neither error stands alone."), ""
    if len(one["pairs"]) > _FEW:
        yield f"{len(one['pairs']) - _FEW} more pairs of keys go together.", ""
    if one["neighbours"]["waves"]:
        yield _waves(one["neighbours"]), "warn"
        gain = one["after"]["gain"]
        if not one["free"]["offset"] and abs(gain["mean"]) > _LEVEL * gain["rms"]:
            yield (f"Most of that is the level, {gain['mean']:+.2f} dB: free a key that sets the gain, or give "
                   "--offset where the instruments may be off by as much."), ""
    if not one["converged"]:
        yield "The fit had not come to its end when it was stopped: the values are not the best.", "warn"
    for caution in one["cautions"]:
        yield f"caution: {caution}", "warn"
    for caution in one["mended"]:
        yield f"mended: {caution}", ""


def _together(group: Entry) -> str:
    names = listed(group["keys"])
    if len(group["keys"]) > 1:
        beside = f", beside {listed(group['beside'])}" if group["beside"] else ""
        hold = f"{group['hold']} of them" if group["hold"] > 1 else "one of them"
        return (f"{names} can't be told apart by this sweep{beside}: what one adds another can take away. Leave "
                f"{hold} out of --free; the rest is then told for the values that the file has there.")
    if group["beside"]:
        return (f"{names} can't be told from {listed(group['beside'])}: what one adds the other can take away. "
                "Leave one of them out of --free.")
    return f"{names} is felt, and yet its standard error beside all that is free would be over half of it."


def _lone(one: Entry) -> Iterator[tuple[str, str]]:
    """Keys that the sweep does not feel, and those at a bound."""
    unfelt = [key["path"] for key in one["fitted"] if key["state"] == "not felt"]
    if unfelt:
        does = "is not felt" if len(unfelt) == 1 else "are not felt"
        yield (f"{listed(unfelt)} {does} by this sweep: half as much or twice as much would not show in it."), "warn"
    other = [f"{key['path']} at {show.eng(key['also'], key['unit'])}" for key in one["fitted"]
             if key["also"] is not None]
    if other:
        yield (f"Another answer fits as well: {listed(other)}. The one nearer to the file is taken; the sweep can't "
               "tell which is right."), "warn"
    for key in one["fitted"]:
        if key["state"] == "none":
            yield (f"{key['path']} is not told from 0: two standard errors are "
                   f"{show.eng(key['most'], key['unit'], 2)}."), ""
        elif key["state"] in ("least", "most"):
            yield (f"{key['path']} is as {'small' if key['state'] == 'least' else 'large'} as the fit goes, ten "
                   "thousand times off what it was: it is not what the curve asks for."), "warn"


def _waves(alike: Entry) -> str:
    worst = max((alike["gain"], "gain"), (alike["phase"] or 0.0, "phase"))
    return (f"What is left of the {worst[1]} is no noise: neighbouring points are off alike (correlation "
            f"{worst[0]:.2f}). Something that is not free shapes this curve too, so that the errors above are too "
            "small, and the values make up for what is missing.")


def ending(one: Entry) -> str:
    """What has become of the file."""
    moved = [key for key in one["fitted"] if key["text"] and key["text"] != key["now_text"]]
    count = len(moved)
    if not count:
        return "nothing is to be put into the file"
    values = f"{count} value{'s' * (count != 1)}"
    if one["written"]:
        return f"{values} written into {one['file']}"
    return f"the file is as it was; --write puts {values} into it"
