"""Fuzz recipe, number and table reading: no crash, and no input over a second.

    python tests/fuzz/fuzz.py recipe --runs 1000000            coverage-guided, with atheris
    python tests/fuzz/fuzz.py recipe --runs 1000000 --plain    seeded mutation, nothing needed
    add --record to append the count to RECORD.md, --corpus FOLDER to keep what was found

The plain way mutates the seeds and whatever --corpus holds; it runs several times as many inputs a
second because nothing is instrumented. A second is counted as processor time of this process,
so that a busy machine raises no false alarm.
"""

from __future__ import annotations

import argparse
import random
import re
import subprocess
import sys
import tempfile
import time
from datetime import UTC, datetime
from pathlib import Path

HERE = Path(__file__).resolve().parent
ROOT = HERE.parents[1]
LONGEST_S = 1.0
MOST_BYTES = {"recipe": 120, "number": 60, "table": 1200}


def load():
    """Return the module of targets, whatever folder this is run from."""
    for folder in (str(ROOT), str(HERE)):
        if folder not in sys.path:
            sys.path.insert(0, folder)
    import targets

    return targets


class Timed:
    """A target that counts its inputs and raises for one that takes over a second."""

    def __init__(self, target) -> None:
        self.target = target
        self.runs = self.accepted = 0
        self.longest = 0.0

    def __call__(self, content: bytes) -> None:
        start = time.process_time()
        self.accepted += self.target(content)
        took = time.process_time() - start
        self.runs += 1
        if took > self.longest:
            self.longest = took
            if took > LONGEST_S:
                raise TimeoutError(f"{took:.1f} s for {content!r}")


def mutated(draw: random.Random, pool, tokens, most: int) -> bytes:
    """Return one input near those of the pool."""
    content = bytearray(draw.choice(pool))
    for _ in range(draw.choice((1, 1, 2, 3, 6))):
        place = draw.randrange(len(content) + 1)
        kind = draw.randrange(6)
        if kind == 0:
            content[place:place] = draw.choice(tokens)
        elif kind == 1:
            content[place : place + draw.randrange(1, 9)] = b""
        elif kind == 2 and place < len(content):
            content[place] = draw.randrange(256)
        elif kind == 3:
            content[place : place + len(token)] = (token := draw.choice(tokens))
        elif kind == 4:
            other = draw.choice(pool)
            content[place:] = other[draw.randrange(len(other) + 1) :]
        else:
            again = content[place : place + draw.randrange(1, 20)]
            content[place:place] = again * draw.choice((1, 1, 2, 8))
    return bytes(content[:most])


def plain(name: str, runs: int, seconds: float, seed: int, corpus: Path | None) -> Timed:
    """Run seeded mutations until the runs or the seconds are used up; return the counts."""
    targets = load()
    draw = random.Random(seed)
    pool = list(targets.SEEDS[name])
    if corpus is not None:
        pool += [file.read_bytes() for file in sorted(corpus.iterdir())]
    timed = Timed(targets.TARGETS[name])
    end = time.monotonic() + seconds
    while timed.runs < runs and time.monotonic() < end:
        for _ in range(min(500, runs - timed.runs)):
            content = mutated(draw, pool, targets.TOKENS[name], MOST_BYTES[name])
            try:
                timed(content)
            except BaseException:
                print(f"input: {content!r}", file=sys.stderr)
                raise
    return timed


def guided(name: str, runs: int, seconds: float, seed: int, corpus: Path | None) -> tuple[int, str]:
    """Run atheris in a process of its own; return the runs and its coverage line."""
    with tempfile.TemporaryDirectory() as made:
        folder = corpus or Path(made) / "corpus"
        folder.mkdir(exist_ok=True)
        targets = load()
        for place, content in enumerate(targets.SEEDS[name]):
            (folder / f"seed-{place}").write_bytes(content)
        words = Path(made) / "words"
        words.write_text(
            "".join(
                '"' + "".join(f"\\x{byte:02x}" for byte in token) + '"\n'
                for token in targets.TOKENS[name]
            )
        )
        command = [
            sys.executable, str(HERE / "fuzz.py"), name, "--inside", f"-runs={runs}",
            f"-max_total_time={int(seconds)}", f"-seed={seed}", f"-max_len={MOST_BYTES[name]}",
            f"-dict={words}", "-timeout=120", "-print_final_stats=1", "-rss_limit_mb=2048",
            f"-artifact_prefix={made}/", str(folder),
        ]  # fmt: skip
        done = subprocess.run(
            command, cwd=ROOT, stderr=subprocess.PIPE, text=True, errors="replace", check=False
        )
        if done.returncode != 0:
            print(done.stderr[-6000:], file=sys.stderr)
            for found in Path(made).glob("*-*"):
                print(f"input: {found.read_bytes()!r}", file=sys.stderr)
            sys.exit(1)
    count = re.findall(r"stat::number_of_executed_units:\s*(\d+)", done.stderr)
    cover = re.findall(r"cov: (\d+) ft: (\d+)", done.stderr)
    return int(count[-1]), f"{cover[-1][0]} edges, {cover[-1][1]} features" if cover else ""


def inside(name: str, options: list[str]) -> None:
    """The process that atheris drives: instrument the package, then never return."""
    import atheris

    with atheris.instrument_imports(include=["campaign"]):
        targets = load()
    atheris.Setup([sys.argv[0], *options], Timed(targets.TARGETS[name]))
    atheris.Fuzz()


def main() -> None:
    """Parse the command line and run."""
    if "--inside" in sys.argv:
        place = sys.argv.index("--inside")
        inside(sys.argv[1], sys.argv[place + 1 :])
        return
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("target", choices=sorted(MOST_BYTES))
    parser.add_argument("--runs", type=int, default=100_000)
    parser.add_argument("--seconds", type=float, default=3600.0)
    parser.add_argument("--seed", type=int, default=1)
    parser.add_argument("--plain", action="store_true")
    parser.add_argument("--corpus", type=Path)
    parser.add_argument("--record", action="store_true")
    asked = parser.parse_args()
    start = time.monotonic()
    choices = (asked.target, asked.runs, asked.seconds, asked.seed, asked.corpus)
    if asked.plain:
        timed = plain(*choices)
        runs = timed.runs
        how = "seeded mutation"
        said = f"{timed.accepted} accepted, longest {timed.longest * 1000:.0f} ms"
    else:
        how = "atheris"
        runs, said = guided(*choices)
    took = time.monotonic() - start
    line = f"| {datetime.now(UTC):%Y-%m-%d} | {asked.target} | {how} | {asked.seed} | {runs} "
    line += f"| {took:.0f} | {said} |"
    print(line)
    if asked.record:
        with (HERE / "RECORD.md").open("a", encoding="utf-8") as stream:
            stream.write(line + "\n")


if __name__ == "__main__":
    main()
