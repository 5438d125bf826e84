"""The first tables."""

import sqlalchemy as sa
from alembic import op

from cuebook.store import column_types

revision = "0001"
down_revision = None
branch_labels = None
depends_on = None


def upgrade() -> None:
    """Bring the schema to this revision."""
    op.create_table(
        "cue",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("code", column_types.Words(), nullable=False),
        sa.Column("set_code", column_types.Words(), nullable=False),
        sa.Column("kind", column_types.Words(), nullable=False),
        sa.Column("focus", column_types.Words(), nullable=False),
        sa.Column("pair", column_types.Words(), nullable=False),
        sa.Column("sister_of", column_types.Words(), nullable=True),
        sa.Column("status", column_types.Words(), nullable=False),
        sa.Column("problem", column_types.Words(), nullable=False),
        sa.Column("cycle", column_types.Words(), nullable=True),
        sa.Column("rate_low", column_types.Number(), nullable=True),
        sa.Column("rate_high", column_types.Number(), nullable=True),
        sa.Column("age_low", column_types.Whole(), nullable=True),
        sa.Column("age_high", column_types.Whole(), nullable=True),
        sa.Column("captures", column_types.Words(), nullable=False),
        sa.Column("leaves_out", column_types.Words(), nullable=False),
        sa.Column("caution", column_types.Words(), nullable=False),
        sa.Column("target_metric", column_types.Words(), nullable=True),
        sa.Column("watch_metric", column_types.Words(), nullable=True),
        sa.CheckConstraint(
            "cycle IN ('step', 'stride', 'stroke', 'beat', 'count_of_eight', 'breath', 'repetition', 'turn')",
            name=op.f("ck_cue_cycle"),
        ),
        sa.CheckConstraint(
            "focus IN ('external_distal', 'external_proximal', 'internal', 'holistic', 'auditory', 'mixed', 'none')",
            name=op.f("ck_cue_focus"),
        ),
        sa.CheckConstraint(
            "kind IN ('analogy', 'explicit_rule', 'question', 'rhythm_sound', 'demonstration', 'touch_guidance', 'visual_mark', 'task_change', 'keyword', 'learner_own')",
            name=op.f("ck_cue_kind"),
        ),
        sa.CheckConstraint(
            "status IN ('ready', 'therapist_only', 'retired')", name=op.f("ck_cue_status")
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_cue")),
        sa.UniqueConstraint("code", name=op.f("uq_cue_code")),
        sqlite_strict=True,
    )
    op.create_table(
        "learner",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("code", column_types.Words(), nullable=False),
        sa.Column("age_band", column_types.Words(), nullable=True),
        sa.Column("experience", column_types.Words(), nullable=True),
        sa.Column("is_returning", column_types.Flag(), nullable=False),
        sa.Column("language", column_types.Words(), nullable=False),
        sa.Column("is_demo", column_types.Flag(), nullable=False),
        sa.CheckConstraint(
            "age_band IN ('3-5', '6-8', '9-12', '13-17', '18-39', '40-64', '65-74', '75-84', '85+')",
            name=op.f("ck_learner_age_band"),
        ),
        sa.CheckConstraint(
            "experience IN ('novice', 'advanced_beginner', 'intermediate', 'advanced', 'expert')",
            name=op.f("ck_learner_experience"),
        ),
        sa.CheckConstraint("is_demo IN (0, 1)", name=op.f("ck_learner_is_demo")),
        sa.CheckConstraint("is_returning IN (0, 1)", name=op.f("ck_learner_is_returning")),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_learner")),
        sa.UniqueConstraint("code", name=op.f("uq_learner_code")),
        sqlite_strict=True,
    )
    op.create_table(
        "learner_group",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("code", column_types.Words(), nullable=False),
        sa.Column("label", column_types.Words(), nullable=False),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_learner_group")),
        sa.UniqueConstraint("code", name=op.f("uq_learner_group_code")),
        sqlite_strict=True,
    )
    op.create_table(
        "library_revision",
        sa.Column("what", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.CheckConstraint("what IN ('cues', 'evidence')", name=op.f("ck_library_revision_what")),
        sa.PrimaryKeyConstraint("what", name=op.f("pk_library_revision")),
        sqlite_strict=True,
    )
    op.create_table(
        "original",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("sha256", column_types.Words(), nullable=False),
        sa.Column("size_bytes", column_types.Whole(), nullable=False),
        sa.Column("unblanked_sha256", column_types.Words(), nullable=True),
        sa.CheckConstraint("size_bytes >= 0", name=op.f("ck_original_size_bytes")),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_original")),
        sa.UniqueConstraint("sha256", name=op.f("uq_original_sha256")),
        sqlite_strict=True,
    )
    op.create_table(
        "protocol",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("facts", column_types.Document(), nullable=False),
        sa.Column("digest", column_types.Words(), nullable=False),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_protocol")),
        sa.UniqueConstraint("digest", name=op.f("uq_protocol_digest")),
        sqlite_strict=True,
    )
    op.create_table(
        "ranking_cache",
        sa.Column("question", column_types.Words(), nullable=False),
        sa.Column("evidence_revision", column_types.Whole(), nullable=False),
        sa.Column("engine", column_types.Words(), nullable=False),
        sa.Column("n_uses", column_types.Whole(), nullable=False),
        sa.Column("made_at", column_types.Moment(), nullable=False),
        sa.Column("document", column_types.Document(), nullable=False),
        sa.PrimaryKeyConstraint("question", name=op.f("pk_ranking_cache")),
        sqlite_strict=True,
    )
    op.create_table(
        "recipe",
        sa.Column("id", sa.Integer(), nullable=False),
        sa.Column("digest", column_types.Words(), nullable=False),
        sa.Column("choices", column_types.Document(), nullable=False),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_recipe")),
        sa.UniqueConstraint("digest", name=op.f("uq_recipe_digest")),
        sqlite_strict=True,
    )
    op.create_table(
        "staff",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("code", column_types.Words(), nullable=False),
        sa.Column("role", column_types.Words(), nullable=False),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_staff")),
        sa.UniqueConstraint("code", name=op.f("uq_staff_code")),
        sqlite_strict=True,
    )
    op.create_table(
        "claim",
        sa.Column("cue_id", column_types.Key(), nullable=False),
        sa.Column("feature", column_types.Words(), nullable=False),
        sa.Column("says", column_types.Words(), nullable=False),
        sa.Column("place", column_types.Whole(), nullable=False),
        sa.CheckConstraint(
            "says IN ('improves', 'silent', 'may_worsen')", name=op.f("ck_claim_says")
        ),
        sa.ForeignKeyConstraint(
            ["cue_id"], ["cue.id"], name=op.f("fk_claim_cue_id_cue"), ondelete="CASCADE"
        ),
        sa.PrimaryKeyConstraint("cue_id", "feature", name=op.f("pk_claim")),
        sqlite_strict=True,
    )
    op.create_table(
        "consent",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=False),
        sa.Column("item", column_types.Words(), nullable=False),
        sa.Column("answer", column_types.Words(), nullable=False),
        sa.Column("given_by", column_types.Words(), nullable=False),
        sa.Column("how", column_types.Words(), nullable=False),
        sa.Column("assent", column_types.Words(), nullable=False),
        sa.CheckConstraint("answer IN ('yes', 'no', 'not_asked')", name=op.f("ck_consent_answer")),
        sa.CheckConstraint(
            "assent IN ('yes', 'no', 'not_asked', 'not_applicable')", name=op.f("ck_consent_assent")
        ),
        sa.CheckConstraint(
            "given_by IN ('self', 'self_with_support', 'parent_guardian', 'legal_decision_maker')",
            name=op.f("ck_consent_given_by"),
        ),
        sa.CheckConstraint("how IN ('spoken', 'written', 'shown')", name=op.f("ck_consent_how")),
        sa.CheckConstraint(
            "item IN ('take_part', 'record_motion', 'record_video', 'touch', 'share_team', 'use_for_ranking', 'contact')",
            name=op.f("ck_consent_item"),
        ),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_consent_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_consent")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_consent_learner_id"), "consent", ["learner_id"], unique=False)
    op.create_table(
        "correction",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=True),
        sa.Column("table_name", column_types.Words(), nullable=False),
        sa.Column("row_key", column_types.Words(), nullable=False),
        sa.Column("field", column_types.Words(), nullable=False),
        sa.Column("old", column_types.Document(), nullable=True),
        sa.Column("new", column_types.Document(), nullable=True),
        sa.Column("why", column_types.Words(), nullable=False),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_correction_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_correction")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_correction_learner_id"), "correction", ["learner_id"], unique=False)
    op.create_table(
        "cue_tag",
        sa.Column("cue_id", column_types.Key(), nullable=False),
        sa.Column("kind", column_types.Words(), nullable=False),
        sa.Column("word", column_types.Words(), nullable=False),
        sa.Column("place", column_types.Whole(), nullable=False),
        sa.CheckConstraint(
            "kind IN ('task', 'region', 'experience', 'background_good', 'background_avoid', 'access_avoid', 'note_avoid')",
            name=op.f("ck_cue_tag_kind"),
        ),
        sa.ForeignKeyConstraint(
            ["cue_id"], ["cue.id"], name=op.f("fk_cue_tag_cue_id_cue"), ondelete="CASCADE"
        ),
        sa.PrimaryKeyConstraint("cue_id", "kind", "word", name=op.f("pk_cue_tag")),
        sqlite_strict=True,
    )
    op.create_table(
        "draft",
        sa.Column("place", column_types.Words(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=True),
        sa.Column("content", column_types.Document(), nullable=False),
        sa.Column("saved_at", column_types.Moment(), nullable=False),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_draft_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("place", name=op.f("pk_draft")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_draft_learner_id"), "draft", ["learner_id"], unique=False)
    op.create_table(
        "goal",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=True),
        sa.Column("group_id", column_types.Key(), nullable=True),
        sa.Column("words", column_types.Words(), nullable=False),
        sa.Column("status", column_types.Words(), nullable=False),
        sa.Column("icf", column_types.Words(), nullable=True),
        sa.Column("task", column_types.Words(), nullable=False),
        sa.Column("feature", column_types.Words(), nullable=True),
        sa.Column("metric", column_types.Words(), nullable=True),
        sa.Column("direction", column_types.Words(), nullable=True),
        sa.Column("target", column_types.Number(), nullable=True),
        sa.Column("tempo", column_types.Number(), nullable=True),
        sa.Column("worthwhile", column_types.Number(), nullable=True),
        sa.Column("worthwhile_set_at", column_types.Moment(), nullable=True),
        sa.CheckConstraint(
            "direction IN ('higher', 'lower', 'target')", name=op.f("ck_goal_direction")
        ),
        sa.CheckConstraint(
            "status IN ('active', 'on_hold', 'reached', 'dropped')", name=op.f("ck_goal_status")
        ),
        sa.CheckConstraint(
            "(learner_id IS NULL) != (group_id IS NULL)", name=op.f("ck_goal_whose")
        ),
        sa.ForeignKeyConstraint(
            ["group_id"],
            ["learner_group.id"],
            name=op.f("fk_goal_group_id_learner_group"),
            ondelete="CASCADE",
        ),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_goal_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_goal")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_goal_learner_id"), "goal", ["learner_id"], unique=False)
    op.create_table(
        "hold",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=False),
        sa.Column("task", column_types.Words(), nullable=False),
        sa.Column("until", column_types.Words(), nullable=False),
        sa.Column("by_role", column_types.Words(), nullable=False),
        sa.Column("cleared_at", column_types.Moment(), nullable=True),
        sa.Column("cleared_by", column_types.Words(), nullable=True),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_hold_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_hold")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_hold_learner_id"), "hold", ["learner_id"], unique=False)
    op.create_table(
        "learner_background",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=False),
        sa.Column("background", column_types.Words(), nullable=False),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_learner_background_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_learner_background")),
        sa.UniqueConstraint(
            "learner_id", "background", name=op.f("uq_learner_background_learner_id_background")
        ),
        sqlite_strict=True,
    )
    op.create_table(
        "learner_need",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=False),
        sa.Column("access_need", column_types.Words(), nullable=False),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_learner_need_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_learner_need")),
        sa.UniqueConstraint(
            "learner_id", "access_need", name=op.f("uq_learner_need_learner_id_access_need")
        ),
        sqlite_strict=True,
    )
    op.create_table(
        "local_name",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=False),
        sa.Column("name", column_types.Words(), nullable=False),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_local_name_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_local_name")),
        sa.UniqueConstraint("learner_id", name=op.f("uq_local_name_learner_id")),
        sqlite_strict=True,
    )
    op.create_table(
        "membership",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("group_id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=False),
        sa.Column("joined_at", column_types.Moment(), nullable=False),
        sa.Column("left_at", column_types.Moment(), nullable=True),
        sa.ForeignKeyConstraint(
            ["group_id"],
            ["learner_group.id"],
            name=op.f("fk_membership_group_id_learner_group"),
            ondelete="CASCADE",
        ),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_membership_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_membership")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_membership_group_id"), "membership", ["group_id"], unique=False)
    op.create_index(op.f("ix_membership_learner_id"), "membership", ["learner_id"], unique=False)
    op.create_table(
        "problem_phrase",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("cue_id", column_types.Key(), nullable=False),
        sa.Column("phrase", column_types.Words(), nullable=False),
        sa.Column("place", column_types.Whole(), nullable=False),
        sa.ForeignKeyConstraint(
            ["cue_id"], ["cue.id"], name=op.f("fk_problem_phrase_cue_id_cue"), ondelete="CASCADE"
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_problem_phrase")),
        sa.UniqueConstraint("cue_id", "place", name=op.f("uq_problem_phrase_cue_id_place")),
        sqlite_strict=True,
    )
    op.create_table(
        "safety_note",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=False),
        sa.Column("slug", column_types.Words(), nullable=True),
        sa.Column("words", column_types.Words(), nullable=False),
        sa.Column("is_hard", column_types.Flag(), nullable=False),
        sa.Column("tasks", column_types.Document(), nullable=False),
        sa.Column("features", column_types.Document(), nullable=False),
        sa.Column("show_once", column_types.Words(), nullable=True),
        sa.Column("shown_at", column_types.Moment(), nullable=True),
        sa.CheckConstraint(
            "show_once IN ('stop_emergency', 'stop_refer_urgent', 'stop_safeguarding', 'stop_refer', 'defer_protocol', 'defer_body_image', 'refer_falls_check', 'adapt_environment', 'caution_first', 'none')",
            name=op.f("ck_safety_note_show_once"),
        ),
        sa.CheckConstraint("is_hard IN (0, 1)", name=op.f("ck_safety_note_is_hard")),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_safety_note_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_safety_note")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_safety_note_learner_id"), "safety_note", ["learner_id"], unique=False)
    op.create_table(
        "schedule",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=True),
        sa.Column("group_id", column_types.Key(), nullable=True),
        sa.Column("task", column_types.Words(), nullable=False),
        sa.Column("rule", column_types.Words(), nullable=False),
        sa.Column("seed", column_types.Whole(), nullable=False),
        sa.Column("arms", column_types.Document(), nullable=False),
        sa.CheckConstraint(
            "(learner_id IS NULL) != (group_id IS NULL)", name=op.f("ck_schedule_whose")
        ),
        sa.ForeignKeyConstraint(
            ["group_id"],
            ["learner_group.id"],
            name=op.f("fk_schedule_group_id_learner_group"),
            ondelete="CASCADE",
        ),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_schedule_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_schedule")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_schedule_learner_id"), "schedule", ["learner_id"], unique=False)
    op.create_table(
        "session",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=True),
        sa.Column("group_id", column_types.Key(), nullable=True),
        sa.Column("ended_at", column_types.Moment(), nullable=True),
        sa.Column("is_date_only", column_types.Flag(), nullable=False),
        sa.Column("do_not_use", column_types.Flag(), nullable=False),
        sa.CheckConstraint(
            "(learner_id IS NULL) != (group_id IS NULL)", name=op.f("ck_session_whose")
        ),
        sa.CheckConstraint("do_not_use IN (0, 1)", name=op.f("ck_session_do_not_use")),
        sa.CheckConstraint("is_date_only IN (0, 1)", name=op.f("ck_session_is_date_only")),
        sa.ForeignKeyConstraint(
            ["group_id"],
            ["learner_group.id"],
            name=op.f("fk_session_group_id_learner_group"),
            ondelete="CASCADE",
        ),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_session_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_session")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_session_group_id"), "session", ["group_id"], unique=False)
    op.create_index(op.f("ix_session_learner_id"), "session", ["learner_id"], unique=False)
    op.create_table(
        "wording",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("cue_id", column_types.Key(), nullable=False),
        sa.Column("text", column_types.Words(), nullable=False),
        sa.Column("language", column_types.Words(), nullable=False),
        sa.Column("replaces", column_types.Whole(), nullable=True),
        sa.ForeignKeyConstraint(
            ["cue_id"], ["cue.id"], name=op.f("fk_wording_cue_id_cue"), ondelete="CASCADE"
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_wording")),
        sa.UniqueConstraint(
            "cue_id", "language", "revision", name=op.f("uq_wording_cue_id_language_revision")
        ),
        sqlite_strict=True,
    )
    op.create_table(
        "slot",
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("schedule_id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=True),
        sa.Column("place", column_types.Whole(), nullable=False),
        sa.Column("cue", column_types.Words(), nullable=True),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_slot_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.ForeignKeyConstraint(
            ["schedule_id"],
            ["schedule.id"],
            name=op.f("fk_slot_schedule_id_schedule"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_slot")),
        sa.UniqueConstraint("schedule_id", "place", name=op.f("uq_slot_schedule_id_place")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_slot_learner_id"), "slot", ["learner_id"], unique=False)
    op.create_table(
        "block",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("session_id", column_types.Key(), nullable=False),
        sa.Column("number", column_types.Whole(), nullable=False),
        sa.Column("phase", column_types.Words(), nullable=False),
        sa.Column("task", column_types.Words(), nullable=False),
        sa.Column("side", column_types.Words(), nullable=True),
        sa.Column("tempo", column_types.Number(), nullable=True),
        sa.Column("cycle", column_types.Words(), nullable=True),
        sa.Column("protocol_id", column_types.Key(), nullable=True),
        sa.Column("wording_id", column_types.Key(), nullable=True),
        sa.Column("others", column_types.Words(), nullable=False),
        sa.Column("chosen", column_types.Words(), nullable=True),
        sa.Column("delivery", column_types.Words(), nullable=True),
        sa.Column("delivered_by", column_types.Words(), nullable=True),
        sa.Column("event_id", column_types.Key(), nullable=True),
        sa.Column("slot_id", column_types.Key(), nullable=True),
        sa.Column("cue_entered_at", column_types.Moment(), nullable=False),
        sa.CheckConstraint(
            "chosen IN ('random', 'planned', 'going_badly', 'learner_asked', 'unknown')",
            name=op.f("ck_block_chosen"),
        ),
        sa.CheckConstraint(
            "cycle IN ('step', 'stride', 'stroke', 'beat', 'count_of_eight', 'breath', 'repetition', 'turn')",
            name=op.f("ck_block_cycle"),
        ),
        sa.CheckConstraint(
            "delivered_by IN ('teacher', 'assistant')", name=op.f("ck_block_delivered_by")
        ),
        sa.CheckConstraint(
            "delivery IN ('spoken', 'written', 'sung_counted', 'signed', 'shown', 'touched', 'video', 'sound')",
            name=op.f("ck_block_delivery"),
        ),
        sa.CheckConstraint(
            "others IN ('none', 'some', 'many', 'unknown')", name=op.f("ck_block_others")
        ),
        sa.CheckConstraint(
            "phase IN ('baseline', 'acquisition', 'immediate_post', 'retention', 'transfer', 'follow_up')",
            name=op.f("ck_block_phase"),
        ),
        sa.CheckConstraint("side IN ('left', 'right', 'both')", name=op.f("ck_block_side")),
        sa.CheckConstraint(
            "wording_id IS NULL OR phase = 'acquisition'", name=op.f("ck_block_cue_in_practice")
        ),
        sa.CheckConstraint("number >= 1", name=op.f("ck_block_number")),
        sa.ForeignKeyConstraint(
            ["protocol_id"], ["protocol.id"], name=op.f("fk_block_protocol_id_protocol")
        ),
        sa.ForeignKeyConstraint(
            ["session_id"],
            ["session.id"],
            name=op.f("fk_block_session_id_session"),
            ondelete="CASCADE",
        ),
        sa.ForeignKeyConstraint(
            ["slot_id"], ["slot.id"], name=op.f("fk_block_slot_id_slot"), ondelete="SET NULL"
        ),
        sa.ForeignKeyConstraint(
            ["wording_id"], ["wording.id"], name=op.f("fk_block_wording_id_wording")
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_block")),
        sa.UniqueConstraint("session_id", "number", name=op.f("uq_block_session_id_number")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_block_slot_id"), "block", ["slot_id"], unique=False)
    op.create_index(op.f("ix_block_wording_id"), "block", ["wording_id"], unique=False)
    op.create_table(
        "participation",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("block_id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=False),
        sa.Column("presence", column_types.Words(), nullable=False),
        sa.Column("age_band", column_types.Words(), nullable=True),
        sa.Column("experience", column_types.Words(), nullable=True),
        sa.Column("backgrounds", column_types.Document(), nullable=False),
        sa.Column("checks", column_types.Document(), nullable=False),
        sa.CheckConstraint(
            "presence IN ('present', 'absent', 'not_observed')",
            name=op.f("ck_participation_presence"),
        ),
        sa.ForeignKeyConstraint(
            ["block_id"],
            ["block.id"],
            name=op.f("fk_participation_block_id_block"),
            ondelete="CASCADE",
        ),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_participation_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_participation")),
        sa.UniqueConstraint(
            "block_id", "learner_id", name=op.f("uq_participation_block_id_learner_id")
        ),
        sqlite_strict=True,
    )
    op.create_index(
        op.f("ix_participation_learner_id"), "participation", ["learner_id"], unique=False
    )
    op.create_table(
        "recording",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("original_id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=False),
        sa.Column("block_id", column_types.Key(), nullable=False),
        sa.Column("person", column_types.Words(), nullable=False),
        sa.Column("rule", column_types.Document(), nullable=False),
        sa.Column("rule_digest", column_types.Words(), nullable=False),
        sa.Column("rate_hz", column_types.Number(), nullable=True),
        sa.Column("duration_s", column_types.Number(), nullable=True),
        sa.Column("is_current", column_types.Flag(), nullable=False),
        sa.CheckConstraint("is_current IN (0, 1)", name=op.f("ck_recording_is_current")),
        sa.ForeignKeyConstraint(
            ["block_id"], ["block.id"], name=op.f("fk_recording_block_id_block"), ondelete="CASCADE"
        ),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_recording_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.ForeignKeyConstraint(
            ["original_id"], ["original.id"], name=op.f("fk_recording_original_id_original")
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_recording")),
        sa.UniqueConstraint(
            "original_id",
            "learner_id",
            "block_id",
            "person",
            "rule_digest",
            name=op.f("uq_recording_original_id_learner_id_block_id_person_rule_digest"),
        ),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_recording_block_id"), "recording", ["block_id"], unique=False)
    op.create_index(op.f("ix_recording_learner_id"), "recording", ["learner_id"], unique=False)
    op.create_table(
        "happening",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("participation_id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=False),
        sa.Column("event", column_types.Words(), nullable=False),
        sa.CheckConstraint(
            "event IN ('pain', 'dizzy', 'tired', 'near_fall', 'fall', 'distress')",
            name=op.f("ck_happening_event"),
        ),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_happening_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.ForeignKeyConstraint(
            ["participation_id"],
            ["participation.id"],
            name=op.f("fk_happening_participation_id_participation"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_happening")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_happening_learner_id"), "happening", ["learner_id"], unique=False)
    op.create_index(
        op.f("ix_happening_participation_id"), "happening", ["participation_id"], unique=False
    )
    op.create_table(
        "trial",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("id", column_types.Key(), nullable=False),
        sa.Column("participation_id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=False),
        sa.Column("number", column_types.Whole(), nullable=False),
        sa.Column("is_valid", column_types.Flag(), nullable=False),
        sa.CheckConstraint("is_valid IN (0, 1)", name=op.f("ck_trial_is_valid")),
        sa.CheckConstraint("number >= 1", name=op.f("ck_trial_number")),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_trial_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.ForeignKeyConstraint(
            ["participation_id"],
            ["participation.id"],
            name=op.f("fk_trial_participation_id_participation"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("id", name=op.f("pk_trial")),
        sa.UniqueConstraint(
            "participation_id", "number", name=op.f("uq_trial_participation_id_number")
        ),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_trial_learner_id"), "trial", ["learner_id"], unique=False)
    op.create_table(
        "use",
        sa.Column("entered_by", column_types.Words(), nullable=False),
        sa.Column("entered_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_at", column_types.Moment(), nullable=False),
        sa.Column("occurred_zone", column_types.Words(), nullable=False),
        sa.Column("revision", column_types.Whole(), nullable=False),
        sa.Column("participation_id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=False),
        sa.Column("times_said", column_types.Whole(), nullable=True),
        sa.Column("attempts", column_types.Whole(), nullable=True),
        sa.Column("minutes", column_types.Number(), nullable=True),
        sa.Column("observed", column_types.Words(), nullable=True),
        sa.Column("reaction", column_types.Words(), nullable=True),
        sa.Column("words", column_types.Words(), nullable=True),
        sa.Column("stop_reason", column_types.Words(), nullable=True),
        sa.Column("stopped_at", column_types.Moment(), nullable=True),
        sa.CheckConstraint(
            "observed IN ('clear', 'some', 'none', 'worse', 'mixed', 'not_seen')",
            name=op.f("ck_use_observed"),
        ),
        sa.CheckConstraint(
            "reaction IN ('liked', 'disliked', 'confused', 'asked_again', 'gave_own_words', 'declined')",
            name=op.f("ck_use_reaction"),
        ),
        sa.CheckConstraint(
            "stop_reason IN ('planned_end', 'pain', 'dizzy', 'breathless', 'fall_or_near_fall', 'distress', 'fatigue', 'learner_choice', 'equipment', 'red_flag')",
            name=op.f("ck_use_stop_reason"),
        ),
        sa.CheckConstraint("attempts >= 0", name=op.f("ck_use_attempts")),
        sa.CheckConstraint("minutes >= 0", name=op.f("ck_use_minutes")),
        sa.CheckConstraint("times_said >= 0", name=op.f("ck_use_times_said")),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_use_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.ForeignKeyConstraint(
            ["participation_id"],
            ["participation.id"],
            name=op.f("fk_use_participation_id_participation"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("participation_id", name=op.f("pk_use")),
        sqlite_strict=True,
    )
    op.create_index(op.f("ix_use_learner_id"), "use", ["learner_id"], unique=False)
    op.create_table(
        "measurement",
        sa.Column("trial_id", column_types.Key(), nullable=False),
        sa.Column("metric", column_types.Words(), nullable=False),
        sa.Column("recipe_id", sa.Integer(), nullable=False),
        sa.Column("segment", column_types.Words(), nullable=False),
        sa.Column("recording_id", column_types.Words(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=False),
        sa.Column("value", column_types.Number(), nullable=True),
        sa.Column("reason", column_types.Words(), nullable=True),
        sa.Column("n_used", column_types.Whole(), nullable=False),
        sa.Column("flags", column_types.Document(), nullable=False),
        sa.Column("quality", column_types.Document(), nullable=False),
        sa.CheckConstraint(
            "(value IS NULL) = (reason IS NOT NULL)", name=op.f("ck_measurement_value_or_reason")
        ),
        sa.CheckConstraint("n_used >= 0", name=op.f("ck_measurement_n_used")),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_measurement_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.ForeignKeyConstraint(
            ["recipe_id"], ["recipe.id"], name=op.f("fk_measurement_recipe_id_recipe")
        ),
        sa.ForeignKeyConstraint(
            ["trial_id"],
            ["trial.id"],
            name=op.f("fk_measurement_trial_id_trial"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint(
            "trial_id",
            "metric",
            "recipe_id",
            "segment",
            "recording_id",
            name=op.f("pk_measurement"),
        ),
        sqlite_strict=True,
        sqlite_with_rowid=False,
    )
    op.create_index(op.f("ix_measurement_learner_id"), "measurement", ["learner_id"], unique=False)
    op.create_index(op.f("ix_measurement_metric"), "measurement", ["metric"], unique=False)
    op.create_table(
        "trial_recording",
        sa.Column("trial_id", column_types.Key(), nullable=False),
        sa.Column("recording_id", column_types.Key(), nullable=False),
        sa.Column("learner_id", column_types.Key(), nullable=False),
        sa.Column("segment", column_types.Words(), nullable=False),
        sa.ForeignKeyConstraint(
            ["learner_id"],
            ["learner.id"],
            name=op.f("fk_trial_recording_learner_id_learner"),
            ondelete="CASCADE",
        ),
        sa.ForeignKeyConstraint(
            ["recording_id"],
            ["recording.id"],
            name=op.f("fk_trial_recording_recording_id_recording"),
            ondelete="CASCADE",
        ),
        sa.ForeignKeyConstraint(
            ["trial_id"],
            ["trial.id"],
            name=op.f("fk_trial_recording_trial_id_trial"),
            ondelete="CASCADE",
        ),
        sa.PrimaryKeyConstraint("trial_id", "recording_id", name=op.f("pk_trial_recording")),
        sqlite_strict=True,
    )
    op.create_index(
        op.f("ix_trial_recording_learner_id"), "trial_recording", ["learner_id"], unique=False
    )
    op.create_index(
        op.f("ix_trial_recording_recording_id"), "trial_recording", ["recording_id"], unique=False
    )


def downgrade() -> None:
    """Take this revision back."""
    op.drop_index(op.f("ix_trial_recording_recording_id"), table_name="trial_recording")
    op.drop_index(op.f("ix_trial_recording_learner_id"), table_name="trial_recording")
    op.drop_table("trial_recording")
    op.drop_index(op.f("ix_measurement_metric"), table_name="measurement")
    op.drop_index(op.f("ix_measurement_learner_id"), table_name="measurement")
    op.drop_table("measurement")
    op.drop_index(op.f("ix_use_learner_id"), table_name="use")
    op.drop_table("use")
    op.drop_index(op.f("ix_trial_learner_id"), table_name="trial")
    op.drop_table("trial")
    op.drop_index(op.f("ix_happening_participation_id"), table_name="happening")
    op.drop_index(op.f("ix_happening_learner_id"), table_name="happening")
    op.drop_table("happening")
    op.drop_index(op.f("ix_recording_learner_id"), table_name="recording")
    op.drop_index(op.f("ix_recording_block_id"), table_name="recording")
    op.drop_table("recording")
    op.drop_index(op.f("ix_participation_learner_id"), table_name="participation")
    op.drop_table("participation")
    op.drop_index(op.f("ix_block_wording_id"), table_name="block")
    op.drop_index(op.f("ix_block_slot_id"), table_name="block")
    op.drop_table("block")
    op.drop_index(op.f("ix_slot_learner_id"), table_name="slot")
    op.drop_table("slot")
    op.drop_table("wording")
    op.drop_index(op.f("ix_session_learner_id"), table_name="session")
    op.drop_index(op.f("ix_session_group_id"), table_name="session")
    op.drop_table("session")
    op.drop_index(op.f("ix_schedule_learner_id"), table_name="schedule")
    op.drop_table("schedule")
    op.drop_index(op.f("ix_safety_note_learner_id"), table_name="safety_note")
    op.drop_table("safety_note")
    op.drop_table("problem_phrase")
    op.drop_index(op.f("ix_membership_learner_id"), table_name="membership")
    op.drop_index(op.f("ix_membership_group_id"), table_name="membership")
    op.drop_table("membership")
    op.drop_table("local_name")
    op.drop_table("learner_need")
    op.drop_table("learner_background")
    op.drop_index(op.f("ix_hold_learner_id"), table_name="hold")
    op.drop_table("hold")
    op.drop_index(op.f("ix_goal_learner_id"), table_name="goal")
    op.drop_table("goal")
    op.drop_index(op.f("ix_draft_learner_id"), table_name="draft")
    op.drop_table("draft")
    op.drop_table("cue_tag")
    op.drop_index(op.f("ix_correction_learner_id"), table_name="correction")
    op.drop_table("correction")
    op.drop_index(op.f("ix_consent_learner_id"), table_name="consent")
    op.drop_table("consent")
    op.drop_table("claim")
    op.drop_table("staff")
    op.drop_table("recipe")
    op.drop_table("ranking_cache")
    op.drop_table("protocol")
    op.drop_table("original")
    op.drop_table("library_revision")
    op.drop_table("learner_group")
    op.drop_table("learner")
    op.drop_table("cue")
