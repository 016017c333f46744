"""The rules by which markers move, and their names in words."""

from __future__ import annotations

from collections.abc import Iterator, Sequence
from dataclasses import dataclass, replace

from shadowscale.session.session import Markers, Span

LONGEST = 0.45  # cycles from first to fourth contact
LEAST = 1e-5  # cycles between neighbouring contacts
_ORDINALS = ("first", "second", "third", "fourth")
SPANS = {"level": "stretch outside eclipse", "excluded": "excluded stretch"}
EFFECTS = {
    "contact": "where the discs touch; the contacts alone give both radii and the inclination",
    "window": "points inside count as this eclipse: contacts are measured in it, the level outside it",
    "level": "the light outside eclipse is fitted to these stretches alone, the rest is set aside",
    "excluded": "points inside take part in nothing",
}


@dataclass(frozen=True)
class Handle:
    """One thing that can be dragged.

    name : `primary.0` ... `secondary.3`, `primary_window.0`, `level.2.1` (third stretch, right edge)
    words : what it is, for people
    group : `contact`, `window`, `level` or `excluded`
    """

    name: str
    words: str
    group: str
    phase: float
    short: str = ""

    @property
    def effect(self) -> str:
        """What it does to the solution, for people."""
        return EFFECTS[self.group]


def handles(markers: Markers) -> tuple[Handle, ...]:
    """Everything that can be dragged, in the order of the keyboard."""
    return (*_contacts(markers), *_windows(markers), *_stretches(markers))


def handle(markers: Markers, name: str) -> Handle:
    """The handle of that name; KeyError if the markers have none."""
    for found in handles(markers):
        if found.name == name:
            return found
    raise KeyError(name)


def moved(markers: Markers, name: str, phase: float, *, symmetric: bool = False) -> Markers:
    """The markers with one handle moved to `phase`; neighbours are never passed.

    With `symmetric` the contact on the other side of the same eclipse moves as far the other way.
    An eclipse's window always holds its contacts: they push its edges, its edges stop at them.
    """
    part, *numbers = name.split(".")
    if part in ("primary", "secondary"):
        return _moved_contact(markers, part, int(numbers[0]), phase=phase, symmetric=symmetric)
    if part.endswith("_window"):
        contacts = getattr(markers, part.removesuffix("_window"))
        span = _moved_edge(getattr(markers, part), int(numbers[0]), phase)
        span = span if contacts is None else _holding(span, contacts)
        if part == "primary_window":
            return replace(markers, primary_window=span)
        return replace(markers, secondary_window=span)
    spans = list(getattr(markers, part))
    which, edge = int(numbers[0]), int(numbers[1])
    spans[which] = _moved_edge(spans[which], edge, phase)
    return replace(markers, **{part: tuple(spans)})


def without_span(markers: Markers, name: str) -> Markers:
    """The markers without the stretch that the handle belongs to; contacts and windows stay."""
    part, *numbers = name.split(".")
    if part not in SPANS:
        return markers
    spans = list(getattr(markers, part))
    del spans[int(numbers[0])]
    return replace(markers, **{part: tuple(spans)})


def with_span(markers: Markers, part: str, span: Span) -> Markers:
    """The markers with one more stretch, `level` or `excluded`."""
    ordered = (min(span), max(span))
    return replace(markers, **{part: tuple(sorted((*getattr(markers, part), ordered)))})


def describe_move(markers: Markers, name: str) -> str:
    """The step's name in the history."""
    return "Move " + handle(markers, name).words


def _contacts(markers: Markers) -> Iterator[Handle]:
    for part in ("primary", "secondary"):
        phases = getattr(markers, part)
        for number, phase in enumerate(phases or ()):
            words = f"{_ORDINALS[number]} contact of {part} eclipse"
            yield Handle(f"{part}.{number}", words, "contact", phase, str(number + 1))


def _windows(markers: Markers) -> Iterator[Handle]:
    for part in ("primary", "secondary"):
        for number, side in enumerate(("left", "right")):
            phase = getattr(markers, f"{part}_window")[number]
            yield Handle(
                f"{part}_window.{number}",
                f"{side} edge of the window of {part} eclipse",
                "window",
                phase,
            )


def _stretches(markers: Markers) -> Iterator[Handle]:
    for part, words in SPANS.items():
        for which, span in enumerate(getattr(markers, part)):
            for number, side in enumerate(("left", "right")):
                yield Handle(
                    f"{part}.{which}.{number}",
                    f"{side} edge of {words} {which + 1}",
                    part,
                    span[number],
                )


def _moved_edge(span: Span, edge: int, phase: float) -> Span:
    return (
        (min(phase, span[1] - LEAST), span[1])
        if edge == 0
        else (span[0], max(phase, span[0] + LEAST))
    )


def _moved_contact(
    markers: Markers, part: str, number: int, *, phase: float, symmetric: bool
) -> Markers:
    old = getattr(markers, part)
    new = list(old)
    if symmetric:
        middle = (old[0] + old[3]) / 2
        half = _between(abs(phase - middle), *_half_limits(old, number))
        left, right = (0, 3) if number in (0, 3) else (1, 2)
        new[left], new[right] = middle - half, middle + half
    else:
        # in a partial eclipse second and third contact may meet, the others never do
        lower = old[number - 1] + (0.0 if number == 2 else LEAST) if number else old[3] - LONGEST
        upper = (
            old[number + 1] - (0.0 if number == 1 else LEAST) if number < 3 else old[0] + LONGEST
        )
        new[number] = _between(phase, lower, upper)
    window = _holding(getattr(markers, f"{part}_window"), new)
    return replace(markers, **{part: tuple(new), f"{part}_window": window})


def _holding(window: Span, contacts: Sequence[float]) -> Span:
    """The window, widened where a contact lies outside it; the very same one where none does."""
    if window[0] <= contacts[0] and contacts[3] <= window[1]:
        return window
    return min(window[0], contacts[0]), max(window[1], contacts[3])


def _half_limits(contacts: tuple[float, float, float, float], number: int) -> tuple[float, float]:
    if number in (0, 3):
        return (contacts[2] - contacts[1]) / 2 + LEAST, LONGEST / 2
    return 0.0, (contacts[3] - contacts[0]) / 2 - LEAST


def _between(value: float, lower: float, upper: float) -> float:
    return min(max(value, lower), upper)


def with_new_span(markers: Markers, part: str, phase: float, *, width: float = 0.04) -> Markers:
    """The markers with one more stretch of that width around a phase."""
    return with_span(markers, part, (phase - width / 2, phase + width / 2))
