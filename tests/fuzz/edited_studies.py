"""Valid studies with random edits: what a hurried hand, a broken editor or an attacker makes.

Every edit is a function of a random.Random alone, so a number names a text for ever.
"""

from __future__ import annotations

import copy
import json
import random
from pathlib import Path

import yaml

STUDIES = Path(__file__).parents[2] / "studies"

SEEDS = tuple(path.read_text(encoding="utf-8") for path in sorted(STUDIES.glob("*.yaml")))

FROM_THERE = "/dev/zero", "/dev/stdin", "/proc/self/environ", "..", ".", "/", "~", "../" * 40 + "x"

TERMINAL = "\x1b[2J\x1b]0;owned\x07", "\x9b31m", "\u202egnp.exe", "a\u2028b", "\x00", "\ud800", "\r"

NAMES = (
    "../../escaped", "/var/escaped", "a/b", "a\\b", "con", "nul.yaml", "-rf", ".", "", " ",
    "x" * 300,
    "x" * 70_000, "$(touch owned)", "<b>bold</b>", "{chord}", "%s%n", "\N{PILE OF POO}", *TERMINAL,
)  # fmt: skip

NUMBERS = (
    ".inf", "-.inf", ".nan", "1e400", "-1e400", "1e-400", "0", "-1", "-0.0", "9" * 400, "1e308",
    "1_000", "0x1F", "1e9999999", "1/0", "--3", "+", "NaN", "inf", "True", "010", "1e6 m",
)  # fmt: skip

UNITS = (
    "kg", "m", "furlong", "mm mm", "m^99999", "m^9^9^9", "Hz", "km/h/h", "%", "%%", "degC", "deg",
    "1/m", "m**2", "µm", "parsec", "speed_of_light", "10", "m/", "/s", "(m)", "[m]",
    "m*" * 20 + "m",
)  # fmt: skip

TYPES = None, True, [], {}, [[]], {"a": {}}, [1, 2, 3], "text", 3, -2.5, {"value": 3}, [None]

TAGS = (
    '!!python/object/apply:os.system ["touch owned"]', "!!python/name:os.system",
    '!!python/object/new:os.system ["touch owned"]', '!!python/module:os', "!!binary aGk=",
    "!!timestamp 2024-01-01", "!!set {a}", "!!omap [a: 1]", "!own x", "!<tag:x,2000:y> z", "! x",
    '!!python/object/apply:subprocess.Popen [["touch", "owned"]]', "!!float twelve", "!!int []",
)  # fmt: skip


def paths_of(data, above=()):
    """Return the path of every value of a tree, the root left out."""
    below = data.items() if isinstance(data, dict) else enumerate(data)
    found = []
    for key, value in below if isinstance(data, dict | list) else ():
        found.append((*above, key))
        found += paths_of(value, (*above, key)) if isinstance(value, dict | list) else []
    return found


def at(data, path):
    """Return what holds the last step of a path."""
    for step in path[:-1]:
        data = data[step]
    return data


def misspelt(chance, word):
    """Return a word with one letter dropped, doubled, exchanged or put in."""
    letters = list(word) or ["x"]
    k = chance.randrange(len(letters))
    letters[k] = chance.choice(
        ["", letters[k] * 2, chance.choice("abcxyz_- é"), letters[k].swapcase()]
    )
    return "".join(letters)


def dropped(chance, data):
    path = chance.choice(paths_of(data))
    del at(data, path)[path[-1]]


def renamed(chance, data):
    path = chance.choice([one for one in paths_of(data) if isinstance(one[-1], str)])
    block = at(data, path)
    new = misspelt(chance, path[-1]) if chance.random() < 0.7 else chance.choice(NAMES)
    block[new] = block.pop(path[-1])


def moved(chance, data):
    paths = paths_of(data)
    path, other = chance.choice(paths), chance.choice(paths)
    block, value = at(data, other), copy.deepcopy(at(data, path)[path[-1]])
    if isinstance(block, dict):
        block[str(path[-1])] = value
    else:
        block.append(value)


def replaced(values):
    """Return an edit that puts one of the values in the place of another."""

    def edit(chance, data):
        path = chance.choice(paths_of(data))
        at(data, path)[path[-1]] = copy.deepcopy(chance.choice(values))

    return edit


def unit_changed(chance, data):
    texts = [p for p in paths_of(data) if isinstance(at(data, p)[p[-1]], str)]
    path = chance.choice(texts)
    number = at(data, path)[path[-1]].split(" ")[0]
    at(data, path)[path[-1]] = f"{number} {chance.choice(UNITS)}"


def word_misspelt(chance, data):
    texts = [p for p in paths_of(data) if isinstance(at(data, p)[p[-1]], str)]
    path = chance.choice(texts)
    at(data, path)[path[-1]] = misspelt(chance, at(data, path)[path[-1]])


def scaled(chance, data):
    texts = [p for p in paths_of(data) if isinstance(at(data, p)[p[-1]], str)]
    path = chance.choice(texts)
    number, _, unit = at(data, path)[path[-1]].partition(" ")
    try:
        at(data, path)[path[-1]] = f"{float(number) * 10 ** chance.uniform(-9, 9):g} {unit}".strip()
    except ValueError:
        at(data, path)[path[-1]] = f"{chance.choice(NUMBERS)} {unit}".strip()


def baseline_elsewhere(chance, data):
    data.setdefault("section", {})
    if isinstance(data["section"], dict):
        data["section"]["baseline"] = chance.choice((*FROM_THERE, *NAMES))


def many(chance, data):
    path = chance.choice([(key,) for key in data])
    block, count = data[path[0]], chance.choice((50, 400, 3000))
    if isinstance(block, list) and block:
        block += [copy.deepcopy(chance.choice(block)) for _ in range(count)]
    elif isinstance(block, dict) and block:
        some = copy.deepcopy(chance.choice(list(block.values())))
        block |= {f"more_{k}": some for k in range(count)}


TREE_EDITS = {
    "dropped": dropped,
    "renamed": renamed,
    "moved": moved,
    "number": replaced(NUMBERS),
    "type": replaced(TYPES),
    "name": replaced(NAMES),
    "unit": unit_changed,
    "word": word_misspelt,
    "scaled": scaled,
    "baseline": baseline_elsewhere,
    "many": many,
}


def by_tree(chance, kind):
    """Edit the data of a study and write it out again, as YAML or as JSON."""
    data = yaml.load(chance.choice(SEEDS), Loader=yaml.BaseLoader)  # noqa: S506 - texts only
    for _ in range(chance.choice((1, 1, 1, 2, 4))):
        if data:
            TREE_EDITS[kind](chance, data)
    if chance.random() < 0.2:
        return json.dumps(data).replace(r"\ud800", r"\\ud800").encode()
    text = yaml.dump(data, allow_unicode=True, sort_keys=False, default_style=None)
    return text.replace("'", "").encode("utf-8", "surrogatepass")


def doubled(chance, lines):
    k = chance.randrange(len(lines))
    lines.insert(chance.randrange(len(lines)), lines[k])


def line_gone(chance, lines):
    del lines[chance.randrange(len(lines))]


def indented(chance, lines):
    k = chance.randrange(len(lines))
    lines[k] = chance.choice(("\t", " ", "   ", " " * 3000)) + lines[k]


def letter(chance, lines):
    k = chance.randrange(len(lines))
    place = chance.randrange(len(lines[k]) + 1)
    put = chance.choice((*":{}[],&*#?|->%@`'\"!\t\\", *TERMINAL, "\ufeff", "\u00a0", "\x85", "é"))
    lines[k] = lines[k][:place] + put + lines[k][place + chance.randrange(2) :]


def tagged(chance, lines):
    k = chance.choice([k for k, line in enumerate(lines) if ": " in line])
    lines[k] = lines[k].partition(": ")[0] + ": " + chance.choice(TAGS)


def escaped(chance, lines):
    k = chance.choice([k for k, line in enumerate(lines) if ": " in line])
    code = chance.choice((r"\e[2J", r"\x9b1m", r"\u202e", r"\0", r"\uD800", r"\r\n", r"\U0010FFFF"))
    name = chance.random() < 0.5
    head, _, tail = lines[k].partition(": ")
    blank = head[: len(head) - len(head.lstrip())]
    lines[k] = f'{blank}"{head.strip()}{code}": {tail}' if name else f'{head}: "{code}"'


LINE_EDITS = {
    "doubled": doubled,
    "line gone": line_gone,
    "indented": indented,
    "letter": letter,
    "tag": tagged,
    "escape": escaped,
}


def by_line(chance, kind):
    """Edit the text of a study."""
    lines = chance.choice(SEEDS).splitlines()
    for _ in range(chance.choice((1, 1, 2, 5))):
        LINE_EDITS[kind](chance, lines)
    return "\n".join(lines).encode("utf-8", "surrogatepass")


def bomb(chance):
    """Aliases of aliases: powers of values."""
    width, levels = chance.choice((2, 9, 50)), chance.choice((3, 9, 40))
    rows = ["a0: &a0 [" + "x, " * width + "]"]
    rows += [f"a{k}: &a{k} [{', '.join([f'*a{k - 1}'] * width)}]" for k in range(1, levels)]
    merged = [f"m{k}: &m{k} {{<<: [*m{k - 1}, *m{k - 1}], k{k}: 1}}" for k in range(1, levels)]
    return "\n".join(chance.choice((rows, ["m0: &m0 {k: 1}", *merged])))


def deep(chance):
    depth = chance.choice((19, 25, 300, 30_000))
    opened, closed = chance.choice((("[", "]"), ("{a: ", "}"), ("- ", ""), ("? ", "")))
    return "section: " * (opened in "[{a: ") + opened * depth + closed * chance.choice((depth, 0))


def noise(chance):
    return chance.choice((
        "", "\n", "# nothing\n", "---\n---\n", "%YAML 1.1\n---\n", "null", "3", "[]", "{}", "'",
        '"',
        "&a *a", "*a", "? ", "- - -", "x" * 600_000, "a: " + "b" * 500_000, "[" * 100_000,
        "a: " + "9" * 200_000, "\n" * 400_000, "a:\n" * 60_000, "{" + "a, " * 100_000 + "}",
        "<<: {a: 1}", "<<: [1]", "!!map {}", "a: |\n" + " b\n" * 90_000, "? [a]\n: b",
    ))  # fmt: skip


def whole(chance, kind):
    """Make a text that was never a study."""
    if kind == "binary":
        return chance.randbytes(chance.choice((1, 3, 1000, 600_000)))
    return {"bomb": bomb, "deep": deep, "noise": noise}[kind](chance).encode()


def encoded(chance):
    """Return a study in another encoding, or one that is cut."""
    text = chance.choice(SEEDS).replace("# ", "# Flügel ", 1)
    codec = chance.choice(
        ("utf-16", "utf-16-le", "utf-32", "latin-1", "utf-8-sig", "cp037", "utf-7")
    )
    made = text.encode(codec)
    if chance.random() < 0.3:
        data = text.encode()
        made = data[: chance.randrange(len(data))] + chance.choice((b"", b"\xff", b"\xc3", b"\0"))
    return made


WHOLE = ("binary", "bomb", "deep", "noise")

KINDS = (*TREE_EDITS, *LINE_EDITS, *WHOLE, "encoding")


def edited_study(number: int) -> tuple[str, bytes]:
    """Return the kind of edit and the bytes of the study of that number."""
    chance = random.Random(number)  # noqa: S311 - not for secrets
    kind = KINDS[number % len(KINDS)]
    if kind in TREE_EDITS:
        return kind, by_tree(chance, kind)
    if kind in LINE_EDITS:
        return kind, by_line(chance, kind)
    return kind, encoded(chance) if kind == "encoding" else whole(chance, kind)
