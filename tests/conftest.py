"""Empty places to keep a campaign: a SQLite file and, where a server is named, PostgreSQL.

CAMPAIGN_TEST_POSTGRES names a database on a server (postgresql://USER@HOST:PORT/DATABASE) whose
user may make schemas and roles; every test gets a fresh schema there. Without it the tests need
nothing but Python.
"""

import hashlib
import os
import uuid
from contextlib import contextmanager
from dataclasses import dataclass
from pathlib import Path

import pytest

SERVER = os.environ.get("CAMPAIGN_TEST_POSTGRES", "")
KINDS = ("sqlite", "postgresql") if SERVER else ("sqlite",)


def server_url(schema=None):
    """The server's address; tables are found in `schema`."""
    from sqlalchemy.engine import make_url

    url = make_url(SERVER).set(drivername="postgresql+psycopg")
    if schema is not None:
        url = url.update_query_dict({"options": f"-csearch_path={schema}"})
    return url.render_as_string(hide_password=False)


@dataclass(frozen=True)
class Store:
    """A place for one campaign, and how a hand with a SQL shell gets at it."""

    kind: str
    where: str

    @contextmanager
    def connected(self, *, rules=True):
        """A connection that commits every statement; without rules, nothing is checked."""
        from sqlalchemy import create_engine
        from sqlalchemy.pool import NullPool

        address = f"sqlite:///{self.where}" if self.kind == "sqlite" else self.where
        engine = create_engine(address, poolclass=NullPool, isolation_level="AUTOCOMMIT")
        with engine.connect() as connection:
            if rules:
                yield connection
            elif self.kind == "sqlite":
                yield from _without_triggers(connection)
            else:
                connection.exec_driver_sql("SET session_replication_role = replica")
                yield connection

    def ask(self, statement):
        with self.connected() as connection:
            return [tuple(row) for row in connection.exec_driver_sql(statement)]

    def tamper(self, *statements):
        """Do what a hand with a SQL shell could: put every trigger aside, then anything."""
        with self.connected(rules=False) as connection:
            for statement in statements:
                assert connection.exec_driver_sql(statement).rowcount != 0, statement

    def digest(self):
        """Digest of every row of every table."""
        from campaign.ledger import schema

        state = hashlib.sha256()
        with self.connected() as connection:
            for table in schema.metadata.sorted_tables:
                for line in sorted(repr(tuple(row)) for row in connection.execute(table.select())):
                    state.update(f"{table.name} {line}\n".encode())
        return state.hexdigest()


def _without_triggers(connection):
    """Drop the triggers of a SQLite database and put the same ones back afterwards."""
    query = "SELECT name, sql FROM sqlite_master WHERE type = 'trigger'"
    triggers = connection.exec_driver_sql(query).fetchall()
    for name, _ in triggers:
        connection.exec_driver_sql(f"DROP TRIGGER {name}")
    try:
        yield connection
    finally:
        for _, statement in triggers:
            connection.exec_driver_sql(statement)


@contextmanager
def fresh_schema():
    """A schema on the server, dropped with all it holds afterwards."""
    import psycopg

    name = f"test_{uuid.uuid4().hex[:16]}"
    plain = server_url().replace("+psycopg", "")
    with psycopg.connect(plain, autocommit=True) as server:
        server.execute(f"CREATE SCHEMA {name}")
    try:
        yield Store("postgresql", server_url(name))
    finally:
        with psycopg.connect(plain, autocommit=True) as server:
            server.execute(f"SET client_min_messages = error; DROP SCHEMA {name} CASCADE")


@pytest.fixture(params=KINDS)
def empty_store(request, tmp_path):
    """An empty place, of each kind in turn."""
    if request.param == "sqlite":
        yield Store("sqlite", str(tmp_path / "campaign.sqlite"))
    else:
        with fresh_schema() as store:
            yield store


@pytest.fixture(params=KINDS[1:] or KINDS)
def other_store(request, tmp_path):
    """A second empty place: on the server where there is one, else another file."""
    if request.param == "sqlite":
        folder = Path(tmp_path / "other")
        folder.mkdir()
        yield Store("sqlite", str(folder / "campaign.sqlite"))
    else:
        with fresh_schema() as store:
            yield store


@pytest.fixture
def store_of():
    """Return the store of a SQLite file."""
    return lambda path: Store("sqlite", str(path))


@pytest.fixture
def shared_schema():
    """Where a test needs a server: a fresh schema on it (collected only where there is one)."""
    with fresh_schema() as store:
        yield store


def pytest_ignore_collect(collection_path):
    """Tests of what only a server has are not collected without one."""
    return True if not SERVER and collection_path.name.endswith("_on_server.py") else None
