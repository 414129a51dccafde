"""Which remedies hold: each is tried, the rules run again, and what does not mend its verdict or harms another is dropped."""

from __future__ import annotations

from collections.abc import Callable, Iterable, Mapping
from dataclasses import replace

from checker.model.candidate import Candidate, Mark
from checker.model.fact import Fact, Trust
from checker.model.verdict import OUTCOMES, Change, Verdict

MOST = 12  # remedies tried in one run; each costs a run of the rules

Key = tuple[str, str]
Rerun = Callable[[Mapping[str, Candidate]], Mapping[Key, Verdict]]


def tried(found: Mapping[Key, Verdict], choice: Mapping[str, Candidate], rerun: Rerun) -> dict[Key, Verdict]:
    """`found` with those remedies only that were tried and hold. rerun: the verdicts of another choice of candidates."""
    kept = dict(found)
    left = MOST
    for key, verdict in found.items():
        if verdict.remedy is None:
            continue
        holds = False
        if verdict.outcome == "fail" and not verdict.candidate and left:
            left -= 1
            holds = _holds(key, found, rerun(changed(choice, verdict.remedy.changes)))
        if not holds:
            kept[key] = replace(verdict, remedy=None)
    return kept


def _holds(key: Key, before: Mapping[Key, Verdict], after: Mapping[Key, Verdict]) -> bool:
    """Whether the verdict passes now, and no other moved towards fail."""
    mended = after.get(key)
    return mended is not None and mended.outcome == "pass" and not any(_worse(before.get(name), new) for name, new in after.items())


def _worse(old: Verdict | None, new: Verdict) -> bool:
    if old is None:
        return new.outcome in ("fail", "open")
    return OUTCOMES.index(new.outcome) < OUTCOMES.index(old.outcome)


def changed(choice: Mapping[str, Candidate], changes: Iterable[Change]) -> dict[str, Candidate]:
    """The candidates with these changes made."""
    made = dict(choice)
    for change in changes:
        candidate = made.get(change.ref)
        if candidate is not None:
            made[change.ref] = _changed(candidate, change)
    return made


def _changed(candidate: Candidate, change: Change) -> Candidate:
    fact = Fact(change.attribute, change.value, trust=Trust.DECLARED, unit=change.unit, form=change.form)
    if change.attribute == "value":
        return replace(candidate, value=fact)
    if change.attribute == "mark":
        return replace(candidate, marks=(Mark(str(change.value), fact),))
    return replace(candidate, ratings={**candidate.ratings, change.attribute.removeprefix("rating:"): fact})
