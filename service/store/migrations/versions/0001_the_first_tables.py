"""The first tables."""

import sqlalchemy as sa
from alembic import op

from service.store.columns import Moment

revision = "0001"
down_revision = None
branch_labels = None
depends_on = None


def upgrade() -> None:
    """Forwards."""
    op.create_table(
        "counters",
        sa.Column("name", sa.String(length=40), nullable=False),
        sa.Column("value", sa.BigInteger(), nullable=False),
        sa.PrimaryKeyConstraint("name", name=op.f("pk_counters")),
    )
    op.create_table(
        "erasures",
        sa.Column("order_id", sa.String(length=48), nullable=False),
        sa.Column("at", Moment(), nullable=False),
        sa.PrimaryKeyConstraint("order_id", name=op.f("pk_erasures")),
    )
    op.create_table(
        "owners",
        sa.Column("id", sa.String(length=48), nullable=False),
        sa.Column("title", sa.String(length=200), nullable=False),
        sa.Column("is_shop", sa.Boolean(), nullable=False),
        sa.Column("created_at", Moment(), nullable=False),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_owners")),
    )
    op.create_table(
        "stored_files",
        sa.Column("digest", sa.String(length=64), nullable=False),
        sa.Column("byte_count", sa.BigInteger(), nullable=False),
        sa.Column("created_at", Moment(), nullable=False),
        sa.PrimaryKeyConstraint("digest", name=op.f("pk_stored_files")),
    )
    op.create_table(
        "file_holds",
        sa.Column("digest", sa.String(length=64), nullable=False),
        sa.Column("owner_id", sa.String(length=48), nullable=False),
        sa.Column("holder_id", sa.String(length=48), nullable=False),
        sa.Column("what", sa.String(length=40), nullable=False),
        sa.ForeignKeyConstraint(["digest"], ["stored_files.digest"], name=op.f("fk_file_holds_digest_stored_files")),
        sa.ForeignKeyConstraint(["owner_id"], ["owners.id"], name=op.f("fk_file_holds_owner_id_owners")),
        sa.PrimaryKeyConstraint("digest", "holder_id", "what", name=op.f("pk_file_holds")),
    )
    with op.batch_alter_table("file_holds", schema=None) as batch_op:
        batch_op.create_index(batch_op.f("ix_file_holds_digest"), ["digest"], unique=False)
        batch_op.create_index(batch_op.f("ix_file_holds_holder_id"), ["holder_id"], unique=False)
        batch_op.create_index(batch_op.f("ix_file_holds_owner_id"), ["owner_id"], unique=False)

    op.create_table(
        "hooks",
        sa.Column("id", sa.String(length=48), nullable=False),
        sa.Column("owner_id", sa.String(length=48), nullable=False),
        sa.Column("url", sa.String(length=2000), nullable=False),
        sa.Column("types", sa.Text(), nullable=False),
        sa.Column("for_all_orders", sa.Boolean(), nullable=False),
        sa.Column("is_test", sa.Boolean(), nullable=False),
        sa.Column("secrets", sa.JSON(), nullable=False),
        sa.Column("created_at", Moment(), nullable=False),
        sa.Column("disabled_at", Moment(), nullable=True),
        sa.Column("disabled_because", sa.String(length=200), nullable=True),
        sa.Column("quiet_until", Moment(), nullable=True),
        sa.Column("deleted_at", Moment(), nullable=True),
        sa.ForeignKeyConstraint(["owner_id"], ["owners.id"], name=op.f("fk_hooks_owner_id_owners")),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_hooks")),
    )
    with op.batch_alter_table("hooks", schema=None) as batch_op:
        batch_op.create_index(batch_op.f("ix_hooks_owner_id"), ["owner_id"], unique=False)

    op.create_table(
        "kept_answers",
        sa.Column("owner_id", sa.String(length=48), nullable=False),
        sa.Column("operation", sa.String(length=200), nullable=False),
        sa.Column("key", sa.String(length=255), nullable=False),
        sa.Column("digest", sa.String(length=64), nullable=False),
        sa.Column("token", sa.String(length=48), nullable=False),
        sa.Column("status", sa.Integer(), nullable=True),
        sa.Column("headers", sa.JSON(), nullable=True),
        sa.Column("body", sa.LargeBinary(), nullable=True),
        sa.Column("about", sa.String(length=100), nullable=True),
        sa.Column("started_at", Moment(), nullable=False),
        sa.Column("lease_until", Moment(), nullable=False),
        sa.Column("expires_at", Moment(), nullable=False),
        sa.ForeignKeyConstraint(["owner_id"], ["owners.id"], name=op.f("fk_kept_answers_owner_id_owners")),
        sa.PrimaryKeyConstraint("owner_id", "operation", "key", name=op.f("pk_kept_answers")),
    )
    with op.batch_alter_table("kept_answers", schema=None) as batch_op:
        batch_op.create_index(batch_op.f("ix_kept_answers_about"), ["about"], unique=False)
        batch_op.create_index(batch_op.f("ix_kept_answers_expires_at"), ["expires_at"], unique=False)

    op.create_table(
        "keys",
        sa.Column("id", sa.String(length=48), nullable=False),
        sa.Column("owner_id", sa.String(length=48), nullable=False),
        sa.Column("title", sa.String(length=200), nullable=False),
        sa.Column("secret_sha256", sa.String(length=64), nullable=False),
        sa.Column("scopes", sa.String(length=200), nullable=False),
        sa.Column("is_test", sa.Boolean(), nullable=False),
        sa.Column("created_at", Moment(), nullable=False),
        sa.Column("last_used_at", Moment(), nullable=True),
        sa.Column("revoked_at", Moment(), nullable=True),
        sa.ForeignKeyConstraint(["owner_id"], ["owners.id"], name=op.f("fk_keys_owner_id_owners")),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_keys")),
        sa.UniqueConstraint("secret_sha256", name=op.f("uq_keys_secret_sha256")),
    )
    op.create_table(
        "plan_files",
        sa.Column("order_id", sa.String(length=48), nullable=False),
        sa.Column("revision", sa.Integer(), nullable=False),
        sa.Column("disc", sa.Integer(), nullable=False),
        sa.Column("name", sa.String(length=60), nullable=False),
        sa.Column("digest", sa.String(length=64), nullable=False),
        sa.Column("byte_count", sa.BigInteger(), nullable=False),
        sa.Column("media_type", sa.String(length=100), nullable=False),
        sa.Column("saved_as", sa.String(length=300), nullable=False),
        sa.Column("is_for_cutting", sa.Boolean(), nullable=False),
        sa.ForeignKeyConstraint(["digest"], ["stored_files.digest"], name=op.f("fk_plan_files_digest_stored_files")),
        sa.PrimaryKeyConstraint("order_id", "revision", "disc", "name", name=op.f("pk_plan_files")),
    )
    with op.batch_alter_table("plan_files", schema=None) as batch_op:
        batch_op.create_index(batch_op.f("ix_plan_files_digest"), ["digest"], unique=False)

    op.create_table(
        "browser_sessions",
        sa.Column("secret_sha256", sa.String(length=64), nullable=False),
        sa.Column("key_id", sa.String(length=48), nullable=False),
        sa.Column("csrf_token", sa.String(length=64), nullable=False),
        sa.Column("created_at", Moment(), nullable=False),
        sa.Column("expires_at", Moment(), nullable=False),
        sa.ForeignKeyConstraint(["key_id"], ["keys.id"], name=op.f("fk_browser_sessions_key_id_keys")),
        sa.PrimaryKeyConstraint("secret_sha256", name=op.f("pk_browser_sessions")),
    )
    op.create_table(
        "login_links",
        sa.Column("secret_sha256", sa.String(length=64), nullable=False),
        sa.Column("key_id", sa.String(length=48), nullable=False),
        sa.Column("expires_at", Moment(), nullable=False),
        sa.Column("used_at", Moment(), nullable=True),
        sa.ForeignKeyConstraint(["key_id"], ["keys.id"], name=op.f("fk_login_links_key_id_keys")),
        sa.PrimaryKeyConstraint("secret_sha256", name=op.f("pk_login_links")),
    )
    op.create_table(
        "quotes",
        sa.Column("id", sa.String(length=48), nullable=False),
        sa.Column("owner_id", sa.String(length=48), nullable=False),
        sa.Column("key_id", sa.String(length=48), nullable=False),
        sa.Column("inputs_digest", sa.String(length=64), nullable=False),
        sa.Column("quantity", sa.Integer(), nullable=False),
        sa.Column("total", sa.String(length=40), nullable=False),
        sa.Column("currency", sa.String(length=3), nullable=False),
        sa.Column("told", sa.JSON(), nullable=False),
        sa.Column("created_at", Moment(), nullable=False),
        sa.Column("valid_until", Moment(), nullable=False),
        sa.ForeignKeyConstraint(["key_id"], ["keys.id"], name=op.f("fk_quotes_key_id_keys")),
        sa.ForeignKeyConstraint(["owner_id"], ["owners.id"], name=op.f("fk_quotes_owner_id_owners")),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_quotes")),
    )
    with op.batch_alter_table("quotes", schema=None) as batch_op:
        batch_op.create_index(batch_op.f("ix_quotes_owner_id"), ["owner_id"], unique=False)

    op.create_table(
        "runs",
        sa.Column("id", sa.String(length=48), nullable=False),
        sa.Column("owner_id", sa.String(length=48), nullable=False),
        sa.Column("key_id", sa.String(length=48), nullable=False),
        sa.Column("is_test", sa.Boolean(), nullable=False),
        sa.Column("reference", sa.String(length=200), nullable=True),
        sa.Column("archive_digest", sa.String(length=64), nullable=False),
        sa.Column("asked", sa.JSON(), nullable=False),
        sa.Column("order_count", sa.Integer(), nullable=False),
        sa.Column("opened_at", Moment(), nullable=True),
        sa.Column("created_at", Moment(), nullable=False),
        sa.ForeignKeyConstraint(["key_id"], ["keys.id"], name=op.f("fk_runs_key_id_keys")),
        sa.ForeignKeyConstraint(["owner_id"], ["owners.id"], name=op.f("fk_runs_owner_id_owners")),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_runs")),
    )
    with op.batch_alter_table("runs", schema=None) as batch_op:
        batch_op.create_index(batch_op.f("ix_runs_owner_id"), ["owner_id"], unique=False)

    op.create_table(
        "stored_documents",
        sa.Column("owner_id", sa.String(length=48), nullable=False),
        sa.Column("kind", sa.String(length=16), nullable=False),
        sa.Column("id", sa.String(length=64), nullable=False),
        sa.Column("revision", sa.Integer(), nullable=False),
        sa.Column("body", sa.Text(), nullable=False),
        sa.Column("digest", sa.String(length=64), nullable=False),
        sa.Column("key_id", sa.String(length=48), nullable=True),
        sa.Column("created_at", Moment(), nullable=False),
        sa.Column("withdrawn_at", Moment(), nullable=True),
        sa.ForeignKeyConstraint(["key_id"], ["keys.id"], name=op.f("fk_stored_documents_key_id_keys")),
        sa.ForeignKeyConstraint(["owner_id"], ["owners.id"], name=op.f("fk_stored_documents_owner_id_owners")),
        sa.PrimaryKeyConstraint("owner_id", "kind", "id", "revision", name=op.f("pk_stored_documents")),
    )
    op.create_table(
        "orders",
        sa.Column("id", sa.String(length=48), nullable=False),
        sa.Column("owner_id", sa.String(length=48), nullable=False),
        sa.Column("key_id", sa.String(length=48), nullable=True),
        sa.Column("is_test", sa.Boolean(), nullable=False),
        sa.Column("state", sa.String(length=40), nullable=False),
        sa.Column("version", sa.Integer(), nullable=False),
        sa.Column("reference", sa.String(length=200), nullable=True),
        sa.Column("quantity", sa.Integer(), nullable=False),
        sa.Column("tune_digest", sa.String(length=64), nullable=False),
        sa.Column("tune_name", sa.String(length=200), nullable=True),
        sa.Column("movement_id", sa.String(length=64), nullable=False),
        sa.Column("movement_revision", sa.Integer(), nullable=False),
        sa.Column("movement_digest", sa.String(length=64), nullable=False),
        sa.Column("cutter_id", sa.String(length=64), nullable=False),
        sa.Column("cutter_digest", sa.String(length=64), nullable=False),
        sa.Column("settings_digest", sa.String(length=64), nullable=False),
        sa.Column("most_lost_share", sa.Double(), nullable=False),
        sa.Column("release_alone", sa.Boolean(), nullable=False),
        sa.Column("quote_id", sa.String(length=48), nullable=True),
        sa.Column("repeat_of", sa.String(length=48), nullable=True),
        sa.Column("run_id", sa.String(length=48), nullable=True),
        sa.Column("hook_id", sa.String(length=48), nullable=True),
        sa.Column("plan_revision", sa.Integer(), nullable=False),
        sa.Column("reason", sa.String(length=500), nullable=True),
        sa.Column("despite_findings", sa.String(length=500), nullable=True),
        sa.Column("despite_by", sa.String(length=200), nullable=True),
        sa.Column("created_at", Moment(), nullable=False),
        sa.Column("updated_at", Moment(), nullable=False),
        sa.Column("finished_at", Moment(), nullable=True),
        sa.Column("erased_at", Moment(), nullable=True),
        sa.Column("attempt", sa.Integer(), nullable=False),
        sa.Column("taken_by", sa.String(length=100), nullable=True),
        sa.Column("lease_until", Moment(), nullable=True),
        sa.Column("killed", sa.Integer(), nullable=False),
        sa.ForeignKeyConstraint(["hook_id"], ["hooks.id"], name=op.f("fk_orders_hook_id_hooks")),
        sa.ForeignKeyConstraint(["key_id"], ["keys.id"], name=op.f("fk_orders_key_id_keys")),
        sa.ForeignKeyConstraint(["owner_id"], ["owners.id"], name=op.f("fk_orders_owner_id_owners")),
        sa.ForeignKeyConstraint(["quote_id"], ["quotes.id"], name=op.f("fk_orders_quote_id_quotes")),
        sa.ForeignKeyConstraint(["repeat_of"], ["orders.id"], name=op.f("fk_orders_repeat_of_orders")),
        sa.ForeignKeyConstraint(["run_id"], ["runs.id"], name=op.f("fk_orders_run_id_runs")),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_orders")),
    )
    with op.batch_alter_table("orders", schema=None) as batch_op:
        batch_op.create_index("ix_orders_owner_reference", ["owner_id", "reference"], unique=False)
        batch_op.create_index("ix_orders_owner_updated", ["owner_id", "updated_at", "id"], unique=False)
        batch_op.create_index(batch_op.f("ix_orders_run_id"), ["run_id"], unique=False)
        batch_op.create_index("ix_orders_updated", ["updated_at", "id"], unique=False)
        batch_op.create_index("ix_orders_work", ["state", "lease_until"], unique=False)

    op.create_table(
        "events",
        sa.Column("seq", sa.BigInteger(), autoincrement=False, nullable=False),
        sa.Column("order_id", sa.String(length=48), nullable=False),
        sa.Column("owner_id", sa.String(length=48), nullable=False),
        sa.Column("type", sa.String(length=40), nullable=False),
        sa.Column("at", Moment(), nullable=False),
        sa.Column("by", sa.String(length=200), nullable=True),
        sa.Column("data", sa.JSON(), nullable=False),
        sa.ForeignKeyConstraint(["order_id"], ["orders.id"], name=op.f("fk_events_order_id_orders")),
        sa.ForeignKeyConstraint(["owner_id"], ["owners.id"], name=op.f("fk_events_owner_id_owners")),
        sa.PrimaryKeyConstraint("seq", name=op.f("pk_events")),
    )
    with op.batch_alter_table("events", schema=None) as batch_op:
        batch_op.create_index(batch_op.f("ix_events_order_id"), ["order_id"], unique=False)
        batch_op.create_index(batch_op.f("ix_events_owner_id"), ["owner_id"], unique=False)

    op.create_table(
        "plans",
        sa.Column("order_id", sa.String(length=48), nullable=False),
        sa.Column("revision", sa.Integer(), nullable=False),
        sa.Column("engine_version", sa.String(length=40), nullable=False),
        sa.Column("inputs", sa.JSON(), nullable=False),
        sa.Column("told", sa.JSON(), nullable=False),
        sa.Column("good_to_cut", sa.Boolean(), nullable=False),
        sa.Column("lost_share", sa.Double(), nullable=False),
        sa.Column("made_at", Moment(), nullable=False),
        sa.Column("released_at", Moment(), nullable=True),
        sa.Column("released_by", sa.String(length=200), nullable=True),
        sa.Column("release_reason", sa.String(length=500), nullable=True),
        sa.Column("superseded_at", Moment(), nullable=True),
        sa.ForeignKeyConstraint(["order_id"], ["orders.id"], name=op.f("fk_plans_order_id_orders")),
        sa.PrimaryKeyConstraint("order_id", "revision", name=op.f("pk_plans")),
    )
    op.create_table(
        "run_items",
        sa.Column("run_id", sa.String(length=48), nullable=False),
        sa.Column("number", sa.Integer(), nullable=False),
        sa.Column("tune_name", sa.String(length=200), nullable=False),
        sa.Column("movement_id", sa.String(length=64), nullable=False),
        sa.Column("movement_revision", sa.Integer(), nullable=True),
        sa.Column("reference", sa.String(length=200), nullable=True),
        sa.Column("order_id", sa.String(length=48), nullable=True),
        sa.Column("refused", sa.String(length=500), nullable=True),
        sa.ForeignKeyConstraint(["order_id"], ["orders.id"], name=op.f("fk_run_items_order_id_orders")),
        sa.ForeignKeyConstraint(["run_id"], ["runs.id"], name=op.f("fk_run_items_run_id_runs")),
        sa.PrimaryKeyConstraint("run_id", "number", name=op.f("pk_run_items")),
    )
    op.create_table(
        "deliveries",
        sa.Column("id", sa.String(length=48), nullable=False),
        sa.Column("hook_id", sa.String(length=48), nullable=False),
        sa.Column("event_seq", sa.BigInteger(), nullable=True),
        sa.Column("body", sa.Text(), nullable=False),
        sa.Column("state", sa.String(length=40), nullable=False),
        sa.Column("tries", sa.Integer(), nullable=False),
        sa.Column("next_try_at", Moment(), nullable=True),
        sa.Column("lease_until", Moment(), nullable=True),
        sa.Column("last_status", sa.Integer(), nullable=True),
        sa.Column("last_error", sa.String(length=300), nullable=True),
        sa.Column("created_at", Moment(), nullable=False),
        sa.Column("finished_at", Moment(), nullable=True),
        sa.ForeignKeyConstraint(["event_seq"], ["events.seq"], name=op.f("fk_deliveries_event_seq_events")),
        sa.ForeignKeyConstraint(["hook_id"], ["hooks.id"], name=op.f("fk_deliveries_hook_id_hooks")),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_deliveries")),
        sa.UniqueConstraint("hook_id", "event_seq", name=op.f("uq_deliveries_hook_id_event_seq")),
    )
    with op.batch_alter_table("deliveries", schema=None) as batch_op:
        batch_op.create_index("ix_deliveries_due", ["hook_id", "state", "next_try_at"], unique=False)
        batch_op.create_index(batch_op.f("ix_deliveries_event_seq"), ["event_seq"], unique=False)
        batch_op.create_index("ix_deliveries_hook", ["hook_id", "id"], unique=False)
        batch_op.create_index("ix_deliveries_work", ["state", "next_try_at"], unique=False)
    op.execute("INSERT INTO counters (name, value) VALUES ('events', 0)")


def downgrade() -> None:
    """Backwards."""
    with op.batch_alter_table("deliveries", schema=None) as batch_op:
        batch_op.drop_index("ix_deliveries_work")
        batch_op.drop_index("ix_deliveries_hook")
        batch_op.drop_index(batch_op.f("ix_deliveries_event_seq"))
        batch_op.drop_index("ix_deliveries_due")

    op.drop_table("deliveries")
    op.drop_table("run_items")
    op.drop_table("plans")
    with op.batch_alter_table("events", schema=None) as batch_op:
        batch_op.drop_index(batch_op.f("ix_events_owner_id"))
        batch_op.drop_index(batch_op.f("ix_events_order_id"))

    op.drop_table("events")
    with op.batch_alter_table("orders", schema=None) as batch_op:
        batch_op.drop_index("ix_orders_work")
        batch_op.drop_index("ix_orders_updated")
        batch_op.drop_index(batch_op.f("ix_orders_run_id"))
        batch_op.drop_index("ix_orders_owner_updated")
        batch_op.drop_index("ix_orders_owner_reference")

    op.drop_table("orders")
    op.drop_table("stored_documents")
    with op.batch_alter_table("runs", schema=None) as batch_op:
        batch_op.drop_index(batch_op.f("ix_runs_owner_id"))

    op.drop_table("runs")
    with op.batch_alter_table("quotes", schema=None) as batch_op:
        batch_op.drop_index(batch_op.f("ix_quotes_owner_id"))

    op.drop_table("quotes")
    op.drop_table("login_links")
    op.drop_table("browser_sessions")
    with op.batch_alter_table("plan_files", schema=None) as batch_op:
        batch_op.drop_index(batch_op.f("ix_plan_files_digest"))

    op.drop_table("plan_files")
    op.drop_table("keys")
    with op.batch_alter_table("kept_answers", schema=None) as batch_op:
        batch_op.drop_index(batch_op.f("ix_kept_answers_expires_at"))
        batch_op.drop_index(batch_op.f("ix_kept_answers_about"))

    op.drop_table("kept_answers")
    with op.batch_alter_table("hooks", schema=None) as batch_op:
        batch_op.drop_index(batch_op.f("ix_hooks_owner_id"))

    op.drop_table("hooks")
    with op.batch_alter_table("file_holds", schema=None) as batch_op:
        batch_op.drop_index(batch_op.f("ix_file_holds_owner_id"))
        batch_op.drop_index(batch_op.f("ix_file_holds_holder_id"))
        batch_op.drop_index(batch_op.f("ix_file_holds_digest"))

    op.drop_table("file_holds")
    op.drop_table("stored_files")
    op.drop_table("owners")
    op.drop_table("erasures")
    op.drop_table("counters")
