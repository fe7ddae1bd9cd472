"""Runs the migrations on the connection that ``specflow.store.schema`` hands in.

For developers: ``alembic -x url=sqlite:///some.specflow revision --autogenerate -m ...`` (see ``[tool.alembic]``).
"""

from alembic import context
from sqlalchemy import create_engine

from specflow.store.rows import metadata


def run(connection) -> None:
    context.configure(
        connection=connection,
        target_metadata=metadata,
        render_as_batch=connection.dialect.name == "sqlite",
        compare_server_default=True,
    )
    with context.begin_transaction():
        context.run_migrations()


connection = context.config.attributes.get("connection")
if connection is not None:
    run(connection)
else:
    with create_engine(context.get_x_argument(as_dictionary=True)["url"]).begin() as connection:
        run(connection)
