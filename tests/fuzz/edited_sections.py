"""Coordinate files with random edits: cut, mixed up, of other programs' making, or none at all.

Every edit is a function of a random.Random alone, so a number names a file for ever.
"""

from __future__ import annotations

import random

from optim.geometry.curve import cosine_parameters
from optim.geometry.naca import naca_section

WORDS = (
    "nan", "inf", "-inf", "1e400", "1e308", "-1e308", "1e-320", "abc", "", "0", "1,5", "0x1p-2",
    "1_0", "--1", "1e", "\N{MATHEMATICAL BOLD DIGIT ONE}", "\u0661", "\x1b[31m", "\x00", "9" * 5000,
    "1 2 3",
)  # fmt: skip

TITLES = (
    "", "A section", "\x1b[2J\x1b]0;owned\x07", "\u202egnp.exe", "$5 and $6 and \\frac{",
    "<b>&amp;", "x" * 100_000, "../../escaped", "%s%n{}", "naca:2412", "\u2028 two lines",
    "é\x9b31m", "#", "61 61",
)  # fmt: skip


def loop(chance):
    """Return the points of some section as [x, y] lists."""
    digits = chance.choice(("0012", "2412", "4415", "23012", "0006", "6321"))
    count = chance.choice((10, 20, 60, 160))
    return [[float(x), float(y)] for x, y in naca_section(digits).points(cosine_parameters(count))]


def text_of(points, form="{:.6f} {:.6f}"):
    return "".join(form.format(x, y) + "\n" for x, y in points)


def fewer(chance, points):
    count = chance.choice((0, 1, 2, 3, 5, 9, 10, 12))
    return (
        chance.sample(points, min(count, len(points))) if chance.random() < 0.5 else points[:count]
    )


def shuffled(chance, points):
    a, b = sorted(chance.sample(range(len(points) + 1), 2))
    middle = points[a:b]
    chance.shuffle(middle)
    return points[:a] + middle + points[b:]


def moved(chance, points):
    for _ in range(chance.choice((1, 3, 20))):
        point = chance.choice(points)
        point[chance.randrange(2)] += chance.choice(
            (1e-9, 1e-4, 0.05, 1.0, 1e6, -1e300)
        ) * chance.uniform(-1, 1)
    return points


def scaled(chance, points):
    a, b = (chance.choice((1.0, 1e-300, 1e-9, 1e3, 1e160, 1e300, 0.0, -1.0)) for _ in range(2))
    c = chance.choice((0.0, 1e6, 1e18))
    return [[a * x + c, b * y] for x, y in points]


def turned(_chance, points):
    return [[y, x] for x, y in points][::-1]


def repeated(chance, points):
    k = chance.randrange(len(points))
    return points[:k] + [points[k]] * chance.choice((1, 2, 500, 9900)) + points[k:]


def folded(chance, points):
    return [[x, y * (1.0 - chance.choice((1.0, 2.0, 3.0)) * x)] for x, y in points]


def gone(chance, points):
    a, b = sorted(chance.sample(range(len(points) + 1), 2))
    return points[:a] + points[b:]


def cloud(chance, points):
    return [[chance.random(), chance.uniform(-0.1, 0.1)] for _ in points]


POINT_EDITS = {
    "fewer": fewer,
    "shuffled": shuffled,
    "moved": moved,
    "scaled": scaled,
    "turned": turned,
    "repeated": repeated,
    "folded": folded,
    "gone": gone,
    "cloud": cloud,
}


def word(chance, text):
    lines = text.splitlines()
    for _ in range(chance.choice((1, 1, 5))):
        k = chance.randrange(len(lines))
        words = lines[k].split()
        words[chance.randrange(len(words))] = chance.choice(WORDS)
        lines[k] = chance.choice((" ", ",", "\t", ";", "  ")).join(words) or "x"
    return "\n".join(lines)


def titled(chance, text):
    return chance.choice(TITLES) + "\n" + text


def letter(chance, text):
    for _ in range(chance.choice((1, 3, 30))):
        k = chance.randrange(len(text))
        text = (
            text[:k] + chance.choice(" \n\t,;.eE+-0129x#\r\x0b\x0c\x85\u2028é\x1b") + text[k + 1 :]
        )
    return text


def columns(chance, text):
    return "".join(
        f"{line} {chance.choice(('', '1', '0.5 0.5', 'x', '#'))}\n" for line in text.splitlines()
    )


TEXT_EDITS = {"word": word, "title": titled, "letter": letter, "columns": columns}


def noise(chance):
    return chance.choice((
        b"", b"\n", b" ", b"# nothing\n", b"\xef\xbb\xbf", b"\xff\xfe", b"0 0\n" * 20,
        b"0 0 0\n" * 9,
        b"0.5 0.1\n" * 200_000, b"9" * 900_000, b"1 " * 400_000, b"e" * 1_000_000,
        b"\n" * 1_000_000,
        b"1e-999999999 1\n" * 30, b"x\n" * 300_000, b"-" * 500_000 + b" 1\n",
        b"<?xml version='1.0'?>\n<svg/>",
        b"{\"x\": [1, 2]}", b"PK\x03\x04" + bytes(100),
        chance.randbytes(chance.choice((1, 100, 200_000))),
        bytes(chance.choice((1, 5000, 2_000_000))), b"1 0\n0.5 0.1\n" * 4999,
    ))  # fmt: skip


def encoded(chance, text):
    made = titled(chance, text).encode(
        chance.choice(("utf-16", "utf-32", "utf-8-sig", "utf-7", "cp037", "utf-8")), "replace"
    )
    return made if chance.random() < 0.5 else made[: chance.randrange(len(made))] + b"\xff\xc3"


KINDS = (*POINT_EDITS, *TEXT_EDITS, "noise", "encoding")


def edited_section(number: int) -> tuple[str, bytes]:
    """Return the kind of edit and the bytes of the coordinate file of that number."""
    chance = random.Random(number)  # noqa: S311 - not for secrets
    kind = KINDS[number % len(KINDS)]
    if kind == "noise":
        return kind, noise(chance)
    points = loop(chance)
    if kind in POINT_EDITS:
        form = chance.choice(("{:.6f} {:.6f}", "{!r} {!r}", "{:.3f},{:.3f}", "{:e}\t{:e}"))
        return kind, text_of(POINT_EDITS[kind](chance, points), form).encode()
    if kind == "encoding":
        return kind, encoded(chance, text_of(points))
    return kind, TEXT_EDITS[kind](chance, text_of(points)).encode("utf-8", "surrogatepass")
