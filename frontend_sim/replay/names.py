"""Names of runs, their seeds, and their files."""

from __future__ import annotations

import hashlib
import re

LONGEST = 120
"""Characters of a file's name; longer ones end in a digest."""

_UNSAFE = re.compile(r'[%/\\:*?"<>|\x00-\x1f\x7f]')


def seed_of(set_seed: int, name: str) -> int:
    """Return the seed of a run: it depends on the seed of the set and its own name alone."""
    digest = hashlib.sha256(f"{set_seed}\x1f{name}".encode()).digest()
    return int.from_bytes(digest[:8], "big") >> 1  # a seed is below 2^63


def file_name(run: str) -> str:
    """Return the name of a run's record, different for different runs, without a folder.

    What a file system may refuse becomes ``%`` and hexadecimal digits, as in a URL; of names that
    differ in case alone each has a digest, as some file systems take them for the same.
    """
    safe = _UNSAFE.sub(lambda found: f"%{ord(found[0]):02X}", run)
    safe = f"%{ord(safe[0]):02X}{safe[1:]}" if safe[:1] in (".", "-") else safe
    unlike = safe.replace("degC", "")  # a unit that no other case of letters gives
    if unlike == unlike.lower() and len(safe.encode()) <= LONGEST and safe.isascii() and safe:
        return f"{safe}.h5"
    digest = hashlib.sha256(run.encode()).hexdigest()[:12]
    kept = safe.encode("ascii", "replace").decode().replace("?", "_")[: LONGEST - 13]
    return f"{kept}.{digest}.h5"
