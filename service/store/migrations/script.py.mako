"""${message}."""

import sqlalchemy as sa
from alembic import op
${imports if imports else ""}
revision = ${repr(up_revision)}
down_revision = ${repr(down_revision)}
branch_labels = None
depends_on = None


def upgrade() -> None:
    """Forwards."""
    ${upgrades if upgrades else "pass"}


def downgrade() -> None:
    """Backwards."""
    ${downgrades if downgrades else "pass"}
