"""Damages bytes at random: what arrives from disks, mails and people."""

from __future__ import annotations

import random

TOKENS = (
    b"\x00", b"\xff\xfe", b"\xef\xbb\xbf", b"\r", b"\n", b"\r\n", b'"', b"'", b",", b";", b"\t", b"|", b" ", b"NaN", b"inf", b"-inf", b"1e999", b"-", b"--", b"#", b"%", b"1,234", b"1.234.567", b"9" * 400,
    b"\xc3", b"\xe2\x88\x92", b"2024-02-30", b"25:61:99", b"00:00", b"12/31/99", b"=1+1", b"time (s)", b"[", b"(", b")", b"0x1F", b"1_000", b"\xa0", b"1e5", b"1d5", b"\x1a", b"(mL/min", b"mL/min)",
    b"-9999", b"32767", b"1.#QNAN", b"<script>", b"../..", b"\x0c", b"\x85", b"\xe2\x80\xa8", b"True", b"None", b"1:2:3", b"+", b".", b"e", b"1e", b"{}", b"sample", b"1/2/3",
)  # fmt: skip


def mutated(data: bytes, rng: random.Random) -> bytes:
    """Return the bytes with one to eight injuries."""
    out = bytearray(data)
    for _ in range(rng.randint(1, 8)):
        place = rng.randrange(len(out) + 1)
        what = rng.randrange(8)
        if what == 0:
            out[place:place] = rng.choice(TOKENS) * rng.choice((1, 1, 1, 3))
        elif what == 1:
            del out[place : place + rng.randint(1, 30)]
        elif what == 2 and out:
            out[min(place, len(out) - 1)] = rng.randrange(256)
        elif what == 3:
            begin = rng.randrange(len(out) + 1)
            out[place:place] = out[begin : begin + rng.randint(1, 200)]
        elif what == 4:
            del out[place:]
        elif what == 5:
            old, new = rng.choice(TOKENS), rng.choice(TOKENS)
            out = bytearray(bytes(out).replace(old, new, rng.randint(1, 5)))
        elif what == 6:
            out[place : place + 2] = rng.choice(TOKENS)
        else:
            lines = bytes(out).splitlines(keepends=True)
            rng.shuffle(lines) if rng.random() < 0.2 else lines.reverse() if rng.random() < 0.2 else lines[: rng.randint(0, 3)]
            out = bytearray(b"".join(lines))
        if len(out) > 200_000:
            del out[200_000:]
    return bytes(out)
