"""What only a server has: roles, locales, waits between transactions, a password that is asked."""

import threading
import uuid
from contextlib import contextmanager

import pytest
from sqlalchemy.engine import make_url

from campaign.errors import Refused
from campaign.ledger.checking import check
from campaign.ledger.copying import copy_campaign
from campaign.ledger.database import open_database
from campaign.ledger.filters import Filter
from campaign.ledger.history import history
from campaign.ledger.selecting import list_cells, list_measurements
from campaign.ledger.starting import start


def raw(store):
    import psycopg

    return psycopg.connect(store.where.replace("+psycopg", ""), autocommit=True)


@pytest.fixture
def kept(shared_schema, filled, tmp_path):
    start(shared_schema.where, "UTC", "tester")
    filled(shared_schema.where, tmp_path)
    return shared_schema


@pytest.fixture
def reader(kept):
    """The address of a user who may read the campaign and nothing else."""
    name = f"reader_{uuid.uuid4().hex[:12]}"
    with raw(kept) as server:
        schema = server.execute("SELECT current_schema()").fetchone()[0]
        server.execute(f"CREATE ROLE {name} LOGIN PASSWORD 'hunter2'")
        server.execute(f"GRANT USAGE ON SCHEMA {schema} TO {name}")
        server.execute(f"GRANT SELECT ON ALL TABLES IN SCHEMA {schema} TO {name}")
    url = make_url(kept.where).set(username=name, password="hunter2")
    yield url.render_as_string(hide_password=False)
    with raw(kept) as server:
        server.execute(f"DROP OWNED BY {name}; DROP ROLE {name}")


def test_a_reader_can_ask_everything(reader, campaign):
    for command in (
        ("list", "measurements"), ("show", "cell", "C1"), ("history",), ("trend", "concentration"),
        ("summary",), ("explain", "film"), ("check",), ("criteria",),
    ):  # fmt: skip
        done = campaign(*command, "--db", reader)
        assert done.code == 0, (command, done.err)
        assert "hunter2" not in done.out + done.err


def test_a_reader_who_writes_is_refused_in_one_sentence(reader, kept, campaign, tmp_path):
    before = kept.digest()
    (tmp_path / "more.csv").write_text(MORE, encoding="utf-8")
    for command in (
        ("amend", "cell", "C1", "area_cm2=2", "--reason", "x"),
        ("withdraw", "cell", "C1", "--reason", "x"),
        ("import", str(tmp_path / "more.csv")),
    ):
        said = campaign(*command, "--db", reader).sentence
        assert "may read the campaign" in said and "hunter2" not in said
    assert kept.digest() == before


MORE = (
    "cell,measured_at,potential_V,temperature_C,R_ct\nC1,2026-06-01T10:00Z,3.4,25,40\n"
)


def test_a_reader_takes_a_copy_home(reader, tmp_path):
    made = copy_campaign(open_database(reader), str(tmp_path / "home.sqlite"))
    with open_database(str(tmp_path / "home.sqlite")).reading() as connection:
        assert check(connection, made.head) == []


def test_a_user_or_a_database_that_is_not_there(kept, campaign):
    url = make_url(kept.where)
    for other in (url.set(username="nobody_here", password="hunter2"),
                  url.set(database="nothing_here", password="hunter2")):  # fmt: skip
        text = other.render_as_string(hide_password=False)
        said = campaign("list", "cells", "--db", text).sentence
        assert "hunter2" not in said and "does not exist" in said


def test_a_second_campaign_is_not_started_in_the_same_place(kept):
    before = kept.digest()
    with pytest.raises(Refused, match="left as it is"):
        start(kept.where)
    assert kept.digest() == before


def test_a_copy_to_a_place_that_is_taken_changes_nothing(kept, stored):
    before = kept.digest()
    with pytest.raises(Refused, match="already"):
        copy_campaign(open_database(str(stored)), kept.where)
    assert kept.digest() == before


def test_a_start_that_fails_leaves_an_empty_schema(shared_schema, monkeypatch):
    from campaign.ledger import journal

    def fail(*_):
        raise Refused([])

    monkeypatch.setattr(journal, "_write", fail)
    with pytest.raises(Refused):
        start(shared_schema.where)
    tables = "SELECT count(*) FROM pg_tables WHERE schemaname = current_schema()"
    assert shared_schema.ask(tables) == [(0,)]


@contextmanager
def held(store):
    """Another program holds the writers' lock."""
    from campaign.ledger.database import POSTGRES_LOCK

    with raw(store) as other:
        other.execute(f"SELECT pg_advisory_lock({POSTGRES_LOCK})")
        yield


def test_a_writer_waits_and_then_says_so(kept, campaign):
    with held(kept):
        command = ("amend", "cell", "C1", "area_cm2=2", "--reason", "x")
        said = campaign(*command, "--db", kept.where, CAMPAIGN_WAIT_S="0.2").sentence
        assert "locked" in said and "try again" in said
        assert campaign("list", "cells", "--db", kept.where).code == 0


def test_a_reader_sees_one_state_while_another_writes(kept, filled, tmp_path):
    with open_database(kept.where).reading() as connection:
        first = list_measurements(connection, Filter())
        filled(kept.where, tmp_path, MORE, "more.csv")
        assert list_measurements(connection, Filter()) == first
        assert len(history(connection)) == 2
    with open_database(kept.where).reading() as connection:
        assert len(list_measurements(connection, Filter())) == len(first) + 1


def test_writers_of_one_process_keep_the_chain(kept):
    from campaign.ledger.amending import amend

    def write(worker):
        for number in range(5):
            area = {"area_cm2": f"1.{worker}{number + 1}"}
            amend(open_database(kept.where), "cell", "C1", area, "again", f"worker {worker}")

    threads = [threading.Thread(target=write, args=(worker,)) for worker in range(4)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    with open_database(kept.where).reading() as connection:
        assert check(connection) == []
        assert len(history(connection)) == 2 + 20


def test_another_locale_orders_and_digests_alike(kept, filled, tmp_path):
    """A server sorts as its locale does; the ledger's texts sort bytewise everywhere."""
    name = f"locale_{uuid.uuid4().hex[:12]}"
    with raw(kept) as server:
        server.execute(
            f"CREATE DATABASE {name} TEMPLATE template0 LOCALE_PROVIDER icu ICU_LOCALE 'en-US'"
        )
    url = make_url(kept.where).set(database=name, query={})
    where = url.render_as_string(hide_password=False)
    try:
        start(where, "UTC", "tester")
        filled(where, tmp_path)
        with open_database(where).reading() as connection:
            assert check(connection) == []
            there = [cell["cell"] for cell in list_cells(connection, Filter())]
        with open_database(kept.where).reading() as connection:
            assert there == [cell["cell"] for cell in list_cells(connection, Filter())]
    finally:
        with raw(kept) as server:
            server.execute(f"DROP DATABASE {name} WITH (FORCE)")
