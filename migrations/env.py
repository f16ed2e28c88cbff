"""Run the migrations on the connection the program hands over (no ini file)."""

from alembic import context

connection = context.config.attributes["connection"]
context.configure(
    connection=connection,
    version_table="schema_revision",
    transactional_ddl=True,
    transaction_per_migration=False,
)
# The caller holds the transaction: a migration is all or nothing with its journal entry.
context.run_migrations()
