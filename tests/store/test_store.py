"""What the database promises, on SQLite and on PostgreSQL alike."""

import threading
import time

import pytest
from alembic.autogenerate import compare_metadata
from alembic.runtime.migration import MigrationContext
from sqlalchemy import delete, func, select, text, update
from sqlalchemy.exc import IntegrityError, SQLAlchemyError

from fieldkit.errors import Refusal
from fieldkit.store import db as database
from fieldkit.store import fences, migrate, tables
from fieldkit.store.db import db, writing
from fieldkit.store.tables import EventRow, Notice, Person, Setting

AT = "2026-07-31T12:00:00.000Z"


def event(seq=0, data=b"{}", sha=None):
    return EventRow(
        run="r", chain="d.e", seq=seq, sha256=sha or f"{seq:064d}", kind="remarked", by="vell", data=data, received=AT
    )


def notice(says="look"):
    return Notice(code="x", says=says, about="r", time=AT)


def add(*rows):
    with writing() as session:
        session.add_all(rows)


def test_the_migrations_give_exactly_the_tables_of_this_version(store):
    with db.engine.connect() as connection:
        assert compare_metadata(MigrationContext.configure(connection), db.metadata) == []


def test_upgrading_again_changes_nothing(store):
    add(event())
    migrate.upgrade(db.engine)
    assert db.session.scalar(select(func.count()).select_from(EventRow)) == 1


def test_a_database_of_a_newer_version_is_left_alone(store):
    with writing() as session:
        session.execute(text("UPDATE alembic_version SET version_num = '9999'"))
    with pytest.raises(Refusal) as refused:
        migrate.upgrade(db.engine)
    assert refused.value.code == "newer-database"


def test_bytes_come_back_as_they_went_in(store):
    data = bytes(range(256))
    add(event(data=data))
    db.session.expire_all()
    assert db.session.get(EventRow, ("r", "d.e", 0)).data == data


@pytest.mark.parametrize("again", [event(), event(seq=1, sha=f"{0:064d}")], ids=["same place", "same hash"])
def test_a_second_event_under_the_same_name_is_refused(store, again):
    add(event())
    with pytest.raises(IntegrityError):
        add(EventRow(**{c.key: getattr(again, c.key) for c in EventRow.__table__.columns}))
    assert db.session.scalar(select(func.count()).select_from(EventRow)) == 1


def _change(row):
    row.data = b"other"


def test_the_session_refuses_to_change_a_received_row(store):
    add(event())
    with pytest.raises(fences.Fenced), writing() as session:
        _change(session.get_one(EventRow, ("r", "d.e", 0)))
        session.flush()


def test_the_session_refuses_to_remove_a_received_row(store):
    add(event())
    with pytest.raises(fences.Fenced), writing() as session:
        session.delete(session.get_one(EventRow, ("r", "d.e", 0)))
        session.flush()


@pytest.mark.parametrize("verb", [update(EventRow).values(kind="x"), delete(EventRow)], ids=["update", "delete"])
def test_the_session_refuses_bulk_statements_on_received_rows(store, verb):
    add(event())
    with pytest.raises(fences.Fenced), writing() as session:
        session.execute(verb)


@pytest.mark.parametrize("name", fences.FENCED_NAMES)
@pytest.mark.parametrize("verb", ["UPDATE", "DELETE"])
def test_the_database_itself_refuses_whoever_goes_round_the_session(store, name, verb):
    """A row of every fenced table, then SQL by hand."""
    table = db.metadata.tables[name]
    with db.engine.connect().execution_options(fieldkit_write=True) as connection:
        values = {}
        for column in table.columns:
            kind = column.type.python_type
            values[column.name] = {str: "x", int: 1, bytes: b"x", bool: True}[kind]
        for key in table.foreign_keys:
            _parent(connection, key)
        connection.execute(table.insert().values(**values))
        column = next(iter(table.columns)).name
        statement = f'UPDATE {name} SET "{column}" = "{column}"' if verb == "UPDATE" else f"DELETE FROM {name}"
        with pytest.raises(SQLAlchemyError, match="never changed or removed"):
            connection.exec_driver_sql(statement)


def _parent(connection, key):
    """The row that a foreign key of the test row points to."""
    table = key.column.table
    values = {c.name: {str: "x", int: 1, bytes: b"x", bool: True}[c.type.python_type] for c in table.columns}
    for further in table.foreign_keys:
        _parent(connection, further)
    if connection.execute(select(func.count()).select_from(table)).scalar() == 0:
        connection.execute(table.insert().values(**values))


@pytest.mark.parametrize("name", fences.KEPT_NAMES)
def test_the_database_itself_never_removes_people_keys_runs_or_records(store, name):
    table = db.metadata.tables[name]
    with db.engine.connect().execution_options(fieldkit_write=True) as connection:
        for key in table.foreign_keys:
            _parent(connection, key)
        values = {c.name: {str: "x", int: 1, bytes: b"x", bool: True}[c.type.python_type] for c in table.columns}
        connection.execute(table.insert().values(**values))
        with pytest.raises(SQLAlchemyError, match="never changed or removed"):
            connection.exec_driver_sql(f"DELETE FROM {name}")


def test_truncating_received_rows_is_refused_where_a_database_can(store):
    if db.engine.dialect.name != "postgresql":
        pytest.skip("SQLite has no TRUNCATE")
    add(event())
    with pytest.raises(SQLAlchemyError, match="never changed or removed"), writing() as session:
        session.execute(text("TRUNCATE events"))


def test_a_person_can_be_changed_and_not_removed(store):
    person = Person(id="p", login="p", name="P", roles="[]", password="", active=True, created=AT)
    add(person)
    with writing() as session:
        session.get_one(Person, "p").active = False
    with pytest.raises(fences.Fenced), writing() as session:
        session.execute(delete(Person))


def test_a_foreign_key_is_held(store):
    with pytest.raises(IntegrityError):
        add(tables.Cabinet(id="B2", site="nowhere", data="{}"))


def test_an_operation_that_fails_leaves_nothing(store):
    with pytest.raises(RuntimeError), writing() as session:
        session.add(notice())
        session.flush()
        raise RuntimeError
    assert db.session.scalar(select(func.count()).select_from(Notice)) == 0


def test_a_transaction_inside_another_is_a_fault(store):
    with pytest.raises(RuntimeError, match="inside another"), writing(), writing():
        pass
    add(notice())  # and the session is of use afterwards


def test_what_was_read_before_is_read_again_inside_a_writing_transaction(store):
    """A check made inside the transaction must not look at an older copy."""
    add(Setting(name="n", value="1"))
    seen = db.session.get(Setting, "n")
    assert seen.value == "1"
    db.session.rollback()

    def other():
        with store.app_context():
            with writing() as session:
                session.get_one(Setting, "n").value = "2"
            db.session.remove()

    thread = threading.Thread(target=other)
    thread.start()
    thread.join()
    with writing() as session:
        assert session.get_one(Setting, "n").value == "2"


def test_writers_wait_for_each_other_and_none_is_lost(store, monkeypatch):
    """Eight threads count up 25 times each, reading first: the case that fails at once without a writer's lock."""
    # on a slow disk eight who write without a pause keep one out for many seconds; connections made from now on wait
    monkeypatch.setattr(database, "BUSY_SECONDS", 300)
    db.engine.dispose()
    add(Setting(name="count", value="0"))
    failed = []

    def work():
        with store.app_context():
            try:
                for _ in range(25):
                    db.session.get(Setting, "count")  # a reader that turns writer
                    with writing() as session:
                        row = session.get_one(Setting, "count")
                        row.value = str(int(row.value) + 1)
            except Exception as bad:
                failed.append(bad)
            finally:
                db.session.remove()

    threads = [threading.Thread(target=work) for _ in range(8)]
    for thread in threads:
        thread.start()
    for thread in threads:
        thread.join()
    db.session.expire_all()
    db.session.rollback()
    assert failed == [] and db.session.get(Setting, "count").value == "200"


def test_a_second_writer_waits_while_the_first_one_works(store):
    order = []

    def slow():
        with store.app_context():
            with writing() as session:
                order.append("first in")
                session.add(notice("first"))
                session.flush()
                time.sleep(0.3)
                order.append("first out")
            db.session.remove()

    thread = threading.Thread(target=slow)
    thread.start()
    while not order:
        time.sleep(0.01)
    with writing() as session:
        order.append("second in")
        assert session.scalar(select(func.count()).select_from(Notice)) == 1
    thread.join()
    assert order == ["first in", "first out", "second in"]
