#!/usr/bin/env python3
"""The README's commands work and print what it says they print.

Every ```sh block runs, in order, from the checkout's top folder, line by line in one shell. A line must exit with
status 0, or with N where it ends in `# exit status N`. A ```text block is what the commands of the block before it
print: its lines must occur in that order; `…` stands for any number of lines, or for the rest of a line. A ```toml
block is an excerpt of the demonstration. Every test named in the text exists, and every method is named.
"""

import re
import subprocess
import sys
from pathlib import Path

ROOT = Path(__file__).resolve().parent.parent
DEMONSTRATION = ROOT / "demo-data/break-tank/break-tank.toml"


def blocks(text: str) -> list[tuple[str, list[str]]]:
    found = re.findall(r"^```(\w*)\n(.*?)^```$", text, flags=re.MULTILINE | re.DOTALL)
    return [(language, body.splitlines()) for language, body in found]


def run(line: str) -> tuple[list[str], str | None]:
    """What a command prints, and what is wrong with its exit status."""
    expected = re.search(r"# exit status (\d+)$", line)
    status = int(expected[1]) if expected else 0
    done = subprocess.run(["bash", "-c", line], cwd=ROOT, stdin=subprocess.DEVNULL, stdout=subprocess.PIPE, stderr=subprocess.STDOUT, text=True)
    fault = None if done.returncode == status else f"`{line}` exits with {done.returncode}, not {status}:\n{done.stdout}"
    return done.stdout.splitlines(), fault


def matches(said: str, printed: str) -> bool:
    """Whether a printed line is the one said; spaces of any width are alike."""
    said, printed = (re.sub(r"[\u00a0\u2009\u202f]", " ", line).rstrip() for line in (said, printed))
    return printed.startswith(said[:-1].rstrip()) if said.endswith("…") else printed == said


def compare(said: list[str], printed: list[str]) -> str | None:
    """The first passage (lines between two `…`) that is not printed where the README says so."""
    position = 0
    for passage in re.split(r"^[ ]*…[ ]*$", "\n".join(said), flags=re.MULTILINE):
        lines = passage.strip("\n").split("\n")
        if lines == [""]:
            continue
        starts = range(position, len(printed) - len(lines) + 1)
        found = next((at for at in starts if all(map(matches, lines, printed[at:]))), None)
        if found is None:
            return "\n".join(lines)
        position = found + len(lines)
    return None


def tests_that_do_not_exist(text: str) -> list[str]:
    source = "".join(path.read_text() for folder in ("src", "tests") for path in sorted((ROOT / folder).rglob("*.rs")))
    named = re.findall(r"`((?:val|hand|prop|regress)_\w+)`", text)
    return [name for name in named if f"fn {name}(" not in source]


def main() -> int:
    assert compare(["a", "…", "c…"], ["x", "a", "b", "cd"]) is None
    assert compare(["a", "c"], ["a", "b", "c"]) == "a\nc" and compare(["b", "…", "a"], ["a", "b"]) == "a"
    text = (ROOT / "README.md").read_text()
    faults, commands, outputs = [f"no such test: {name}" for name in tests_that_do_not_exist(text)], 0, 0
    printed: list[str] = []
    for language, lines in blocks(text):
        if language == "sh":
            printed = []
            for line in lines:
                if not line.strip():
                    continue
                print(f"README: {line}", flush=True)
                output, fault = run(line)
                if line.endswith("countermarch methods"):
                    methods = re.findall(r'^"([^"]+)"', "\n".join(output), flags=re.MULTILINE)
                    faults += [f"method not named: {name}" for name in methods if f"`{name}`" not in text]
                    assert len(methods) > 1, "no list of methods"
                printed += output
                commands += 1
                if fault:
                    faults.append(fault)
        elif language == "text":
            outputs += 1
            missing = compare(lines, printed)
            if missing is not None:
                faults.append("not printed as the README says:\n" + missing + "\nprinted was:\n" + "\n".join(printed))
        elif language == "toml":
            missing = compare(lines, DEMONSTRATION.read_text().splitlines())
            if missing is not None:
                faults.append("not in the demonstration:\n" + missing)
    for fault in faults:
        print(fault)
    print(f"README: {commands} commands, {outputs} outputs, {len(faults)} faults")
    return 1 if faults or commands < 2 else 0


if __name__ == "__main__":
    sys.exit(main())
