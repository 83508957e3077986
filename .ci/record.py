#!/usr/bin/env python3
"""A package's pages say what its data say.

usage: record.py PACKAGE FINDING PROBLEM

The text of record.pdf, as poppler extracts it, and record.md must both hold the finding, number, revision and title
of the problem file, and every value of results.json, rounded here afresh: the uncertainty to two significant digits
and the value to match (JCGM 100, 7.2.6), which is given six significant digits at most.
"""

import json
import re
import subprocess
import sys
import tomllib
from decimal import Decimal, ROUND_CEILING, ROUND_HALF_UP
from pathlib import Path


MOST_DIGITS = 6


def places(value: Decimal, digits: int, rounding: str) -> int:
    """Decimal places at which `value`, rounded, has so many significant digits."""
    place = digits - 1 - value.adjusted()
    rounded = value.quantize(Decimal(1).scaleb(-place), rounding=rounding)
    return digits - 1 - rounded.adjusted()


def spellings(result: dict) -> set[str]:
    """Digits under which a value may stand on the page."""
    value = Decimal(repr(result["value"]))
    if value == 0:
        return {"0"}
    cut = MOST_DIGITS - 1 - value.adjusted()
    uncertainty = result["numerical_uncertainty"]
    if not uncertainty:
        # Exact, or no uncertainty claimed.
        return {f"{value.quantize(Decimal(1).scaleb(-cut), rounding=ROUND_HALF_UP).normalize():f}"}
    # The uncertainty is rounded up; nearly round ones may be spelled either way.
    wanted = {min(places(Decimal(repr(uncertainty)), 2, rounding), cut) for rounding in (ROUND_HALF_UP, ROUND_CEILING)}
    return {f"{value.quantize(Decimal(1).scaleb(-place), rounding=ROUND_HALF_UP):f}" for place in wanted}


def words_of(text: str) -> str:
    """On one line, single spaces."""
    return re.sub(r"\s+", " ", text)


def numbers_of(text: str) -> str:
    """Without the spaces that group digits; columns, which two spaces or more keep apart, stay apart."""
    text = re.sub(r"[ \t]{2,}|\n", " | ", re.sub(r"[\u2009\u202f]", " ", text))
    return re.sub(r"(?<=\d) (?=\d)", "", text.replace("\u2212", "-"))


def main() -> int:
    package, finding, problem = Path(sys.argv[1]), sys.argv[2], Path(sys.argv[3])
    data = json.loads((package / "data/results/results.json").read_text())
    head = tomllib.loads(problem.read_text())["calculation"]
    pdf = subprocess.run(["pdftotext", "-layout", package / "data/record.pdf", "-"], check=True, capture_output=True, text=True).stdout
    pages = {"record.pdf": pdf, "record.md": (package / "data/record.md").read_text()}
    faults = [] if data["finding"] == finding else [f"results.json finds {data['finding']!r}, not {finding!r}"]
    checked = 0
    for name, page in pages.items():
        text, numbers = words_of(page), numbers_of(page)
        for words in (f"Finding: {finding}", head["number"], head["title"], str(head["date"])):
            checked += 1
            if words_of(words) not in text:
                faults.append(f"{name} lacks {words!r}")
        for case in data["cases"]:
            for result in case["results"]:
                if result["value"] is None:
                    continue
                checked += 1
                if not any(re.search(rf"(?<![\d.]){re.escape(number)}(?!\d)", numbers) for number in spellings(result)):
                    faults.append(f"{name} lacks {result['symbol']} of case {case['id']}: one of {sorted(spellings(result))}")
    for fault in faults:
        print(fault)
    print(f"{package.name}: {checked} texts looked for, {len(faults)} faults")
    return 1 if faults or checked < 10 else 0


if __name__ == "__main__":
    sys.exit(main())
