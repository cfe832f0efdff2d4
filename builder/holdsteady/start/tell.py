"""What `start` says on the screen: what it saw, what it guessed from it, how sure it is."""

from __future__ import annotations

from collections import Counter
from collections.abc import Iterable, Iterator

from holdsteady.start.draft import Draft, Guess, SourceDraft
from holdsteady.start.toml_text import written

_MOST_LEFT = 10


def told(draft: Draft) -> Iterator[str]:
    """Yield the lines: sources, their keys and characteristics, each guess with rows that show it."""
    for source in draft.sources:
        yield from _source(source)
    if draft.left:
        yield "Left out:"
        yield from (f"  {name}: {why}" for name, why in draft.left[:_MOST_LEFT])
        if len(draft.left) > _MOST_LEFT:
            yield f"  and {len(draft.left) - _MOST_LEFT} more, listed at the end of the settings"
        yield ""
    sure = Counter(confidence for _, _, _, confidence in {key for one in draft.sources for key in _keys(one)})
    yield f"timezone = {written(draft.site.timezone)}: {draft.site.timezone_why}"
    yield f"watch_from = {draft.site.watch_from.isoformat()}: {draft.site.watch_from_why}"
    sources = _count(len(draft.sources), "source")
    many = _count(sum(len(source.characteristics) for source in draft.sources), "characteristic")
    yield f"{sources}, {many}: {sure['sure']} keys sure, {sure['likely']} likely, {sure['guess']} guessed."
    yield "Look at the guesses first: what the files mean, only you know."


def _source(source: SourceDraft) -> Iterator[str]:
    yield f"{source.id}: {', '.join(source.files)}"
    yield f"  {source.seen}"
    yield from (f"    {row}" for row in source.example)
    yield from _guesses(source.guesses)
    yield from (f"  note: {note}" for note in source.notes)
    said = set[tuple[str, str, str]]()
    for one in source.characteristics:
        yield f"  {one.id}: {one.title}"
        new = [guess for guess in one.guesses if (guess.key, written(guess.value), guess.why) not in said]
        said |= {(guess.key, written(guess.value), guess.why) for guess in one.guesses}
        yield from _guesses(new, indent="    ")
        yield from (f"    note: {note}" for note in one.notes)
    yield ""


def _count(number: int, word: str) -> str:
    return f"{number:,} {word}{'s'[: number != 1]}"


def _keys(source: SourceDraft) -> Iterator[tuple[str, str, str, str]]:
    """Yield what tells the guesses of a source apart: characteristics may share one."""
    for guess in (*source.guesses, *(one for each in source.characteristics for one in each.guesses)):
        yield source.id, guess.key, written(guess.value), guess.confidence


def _guesses(guesses: Iterable[Guess], indent: str = "  ") -> Iterator[str]:
    for guess in guesses:
        why = f": {guess.why}" if guess.why else ""
        offered = " (offered, not set)" if guess.offered else ""
        yield f"{indent}{guess.key} = {written(guess.value)}  {guess.confidence}{offered}{why}"
        yield from (f"{indent}    {row}" for row in guess.rows)
