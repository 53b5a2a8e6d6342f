"""What a command line asks for beyond the case file, and the case that comes of it."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import dataclass, field, replace
from pathlib import Path

from bvp.errors import InputError, nearest
from cases.case import Case


@dataclass(frozen=True)
class Settings:
    """The options that mean the same for every command; None is where the case's own value stands."""

    at: Mapping[str, float] = field(default_factory=dict)
    scheme: str | None = None
    intervals: int | None = None
    grid: str | None = None
    digits: int | None = None
    branches: str | None = None
    look_for_others: bool = False
    workers: int = 1
    out: Path | None = None
    resume: bool = False
    json: bool = False
    quiet: bool = False


def refuse_not_built(settings: Settings) -> None:
    """InputError for an option that has its place and is not built yet; options are never accepted and ignored."""
    if settings.branches == "all":
        raise InputError("--branches all is not built yet.\nTrace one branch: leave the option out.")
    if settings.look_for_others:
        raise InputError("--look-for-others is not built yet.\nLeave the option out.")
    if settings.workers > 1:
        raise InputError("--workers above 1 is not built yet.\nLeave the option out.")
    if settings.resume and settings.out is None:
        raise InputError("--resume needs the folder to go on from.\nGive it with --out DIR.")


def asked_for(case: Case, settings: Settings, *, keep_start: bool = False) -> tuple[Case, list[str]]:
    """The case with what the settings change in it, and notices about that.

    A parameter set to another value than the case's takes the published values out, which hold for the case's own;
    for the traced parameter `--at` gives the value at the first state, and they stay. With keep_start its value and
    its start stay those of the case: `hairpin solve` starts there and goes to the value asked for.
    """
    for name in settings.at:
        if name not in case.parameters:
            known = list(case.parameters)
            raise InputError(f'{case.origin}: there is no parameter "{name}" for --at. {nearest(name, known) if known else "It has none."}')
    along = case.trace.along
    at = {name: value for name, value in settings.at.items() if not (keep_start and name == along)}
    notices = []
    changed = [name for name, value in at.items() if name != along and value != case.parameters[name]]
    published = case.published
    if changed and published:
        own = ", ".join(f"{name} = {case.parameters[name]:.17g}" for name in changed)
        notices.append(f"the published values of this case hold for {own} and are left out.")
        published = ()
    question = replace(case.trace, start=at[along]) if along is not None and along in at else case.trace
    how = replace(
        case.discretization,
        scheme=settings.scheme or case.discretization.scheme,
        intervals=settings.intervals or case.discretization.intervals,
        grid=settings.grid or case.discretization.grid,
        digits=settings.digits or case.discretization.digits,
    )
    return replace(case, parameters={**case.parameters, **at}, trace=question, discretization=how, published=published), notices
