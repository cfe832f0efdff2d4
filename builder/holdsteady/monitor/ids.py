"""Names of signals, cases and pages that stay as they are when data arrive elsewhere."""

from __future__ import annotations

import hashlib
import re
import unicodedata
from collections import Counter
from collections.abc import Sequence

_ALPHABET = "0123456789abcdefghjkmnpqrstvwxyz"  # base 32 without i, l, o, u: read aloud without doubt
_LENGTH = 8
_LONGEST = 80
_RESERVED = re.compile(r"(con|prn|aux|nul|com[0-9]|lpt[0-9])", re.ASCII)


def signal_id(characteristic: str, panel: str, rule: str, direction: str, moment: str, ordinal: int) -> str:
    """Return the id of a signal, from what will not change about it.

    `moment` is the fired point's time, or its file and line; `ordinal` tells equals apart.
    """
    key = "\x1f".join((characteristic, panel, rule, direction, moment, str(ordinal)))
    number = int.from_bytes(hashlib.sha256(key.encode()).digest()[:8], "big")
    return "s-" + "".join(_ALPHABET[(number >> (5 * place)) & 31] for place in range(_LENGTH))


def case_form(signal: str) -> str:
    """Return the id that a case takes from a signal of its own."""
    return "c-" + signal[2:]


def slugs(names: Sequence[str]) -> list[str]:
    """Return a file name for each characteristic: lower-case ASCII, safe on every system, unique.

    Names that would share one, or that are too long, carry a digest of their own, so that none depends on
    which others there are.
    """
    plain = [_plain(name) for name in names]
    shared = Counter(plain)
    kept = [shared[s] == 1 and len(s) <= _LONGEST and not _RESERVED.fullmatch(s) for s in plain]
    taken = {slug for slug, keep in zip(plain, kept, strict=True) if keep}
    found = []
    for slug, name, keep in zip(plain, names, kept, strict=True):
        marked, again = slug, 0
        while not keep and (marked in taken or again == 0):
            marked, again = _marked(slug, name, again), again + 1
        taken.add(marked)
        found.append(marked)
    return found


def _plain(name: str) -> str:
    text = unicodedata.normalize("NFKD", name).encode("ascii", "ignore").decode().lower()
    return re.sub(r"[^a-z0-9]+", "-", text).strip("-") or "characteristic"


def _marked(slug: str, name: str, again: int) -> str:
    digest = hashlib.sha256(name.encode() + b"\0" * again).hexdigest()[:8]
    return f"{slug[: _LONGEST - 9].rstrip('-')}-{digest}"
