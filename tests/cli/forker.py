"""Runs the command line again and again, each time in a process of its own.

Starting an interpreter and importing the program costs more than most commands; here both are
done once and every command runs in a fork with its own folder, environment and standard streams.
Jobs come as JSON lines on standard input; what each run said goes out the same way.
"""

import gc
import importlib
import json
import os
import pkgutil
import sys
import tempfile
import traceback

import sqlalchemy.dialects.sqlite.pysqlite

import campaign.chemistry
import campaign.ledger
import campaign.ledger.flat
import campaign.present
from campaign.cli import main as entry

LIGHT = (campaign.chemistry, campaign.ledger, campaign.ledger.flat, campaign.present)


def child(job: dict, streams: list) -> int:
    os.chdir(job["folder"])
    os.environ.clear()
    os.environ.update(job["environment"])
    for number, stream in enumerate(streams):
        os.dup2(stream.fileno(), number)
    sys.stdin = open(0, encoding="utf-8", closefd=False)  # noqa: SIM115
    sys.stdout = open(1, "w", encoding="utf-8", closefd=False)  # noqa: SIM115
    sys.stderr = open(2, "w", encoding="utf-8", closefd=False)  # noqa: SIM115
    sys.argv = ["campaign", *job["arguments"]]
    code = 0
    try:
        entry.main()
    except SystemExit as stop:
        code = stop.code if isinstance(stop.code, int) else int(stop.code is not None)
    except BaseException:
        traceback.print_exc()
        code = 99
    sys.stdout.flush()
    sys.stderr.flush()
    return code


def run(job: dict) -> dict:
    streams = [tempfile.TemporaryFile() for _ in range(3)]  # noqa: SIM115
    streams[0].write(job["given"].encode("latin-1"))
    streams[0].seek(0)
    number = os.fork()
    if number == 0:
        try:
            os._exit(child(job, streams))
        finally:
            os._exit(98)
    code = os.waitstatus_to_exitcode(os.waitpid(number, 0)[1])
    said = []
    for stream in streams[1:]:
        stream.seek(0)
        said.append(stream.read().decode())
    for stream in streams:
        stream.close()
    return {"code": code, "out": said[0], "err": said[1]}


def warm() -> None:
    """Import what most commands use, so that every fork has it."""
    sqlalchemy.create_engine("sqlite://").connect().close()
    for package in LIGHT:
        for module in pkgutil.iter_modules(package.__path__, f"{package.__name__}."):
            importlib.import_module(module.name)
    gc.freeze()


if __name__ == "__main__":
    warm()
    for line in sys.stdin:
        print(json.dumps(run(json.loads(line))), flush=True)
