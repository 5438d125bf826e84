"""What to say when a sentence describes a danger: stop; stay with the person; what to do now."""

from __future__ import annotations

from dataclasses import dataclass

_ALREADY = "Already assessed? Type the movement only."


@dataclass(frozen=True, slots=True)
class Contacts:
    """Whom to reach, as typed in at set-up; none is shipped."""

    emergency_number: str | None = None
    """None if none was typed in."""
    safeguarding_lead: str | None = None
    """None if none was typed in."""
    welfare_lead: str | None = None
    """None if none was typed in."""


def compose_stop_message(action: str, contacts: Contacts | None = None) -> str:
    """Return the message for an action that stops, in the order in which it must be done."""
    known = contacts or Contacts()
    emergency = _name(known.emergency_number, "the local emergency number")
    lead = _name(known.safeguarding_lead, "the safeguarding lead")
    welfare = _name(known.welfare_lead, "the welfare lead")
    messages = {
        "stop_emergency": f"Stop. Stay with the person. Call now: {emergency}.",
        "stop_refer_urgent": (
            "Stop. Stay with the person. Same-day medical care: arrange it now. "
            f"If it gets worse, call {emergency}."
        ),
        "stop_safeguarding": (
            "Stop. Stay with the person. Do not write here what was said; follow your "
            f"safeguarding procedure: {lead}. In immediate danger, call {emergency}."
        ),
        "stop_refer": (
            "Stop this task. Stay with the person until it has settled. "
            f"Ask for a clinician's look before going on. {_ALREADY}"
        ),
        "defer_protocol": (
            "Stop this task. Stay with the person. The surgeon's or therapist's limits decide: "
            f"ask for them and type them as a hard note. {_ALREADY}"
        ),
        "defer_body_image": (
            "Stop: no words on weight, shape or size. Stay with the person and acknowledge what "
            f"was said. Point to {welfare}. Teaching goes on: type the movement only."
        ),
        "refer_falls_check": (
            "Stop for a moment. Stay with the person. Ask them to have a falls check. " + _ALREADY
        ),
        "adapt_environment": (
            "Stop first. Stay with the person. Change light, floor, footwear or equipment before "
            "teaching. Then type the movement only."
        ),
    }
    return messages[action]


def _name(typed_in: str | None, what: str) -> str:
    return typed_in or f"{what} (none is typed in yet)"
