"""Learners: add, show, list; consents and holds."""

from __future__ import annotations

import click

from cuebook.cli.common_options import with_common_options
from cuebook.cli.output import print_json, to_plain
from cuebook.jobs import people


@click.group("learner")
def command() -> None:
    """Add and show learners; note consents and holds."""


@command.command("add")
@click.argument("code", required=False)
@click.option("--age", type=click.IntRange(3, 120), help="Age in years; only the band is kept.")
@click.option("--age-band", help="Age band, such as 65-74.")
@click.option("--experience", help="novice, advanced_beginner, intermediate, advanced, expert.")
@click.option("--background", "backgrounds", multiple=True, help="Work or leisure they know.")
@click.option("--need", "needs", multiple=True, help="Access need, such as low_vision.")
@click.option("--language", default="en", show_default=True, help="BCP 47 tag.")
@click.option("--ranking", type=click.Choice(["yes", "no"]), help="Consent: use in ranking.")
@click.option("--given-by", default="self", show_default=True, help="Who gave the consent.")
@with_common_options
def add(
    location: str | None,
    as_json: bool,  # noqa: FBT001
    code: str | None,
    age: int | None,
    age_band: str | None,
    experience: str | None,
    backgrounds: tuple[str, ...],
    needs: tuple[str, ...],
    language: str,
    ranking: str | None,
    given_by: str,
) -> None:
    """Add a learner; the program makes a code of two plain words unless one is given."""
    made = people.add_learner(
        location,
        people.NewLearner(
            code=code,
            age_years=age,
            age_band=age_band,
            experience=experience,
            backgrounds=backgrounds,
            access_needs=needs,
            language=language,
        ),
    )
    if ranking:
        people.set_consent(location, made, "use_for_ranking", ranking, given_by=given_by)
    if as_json:
        print_json({"format": "cuebook.learner/1", "learner": made})
        return
    click.echo(f"{made} added.")
    if ranking == "yes" and given_by == "parent_guardian":
        click.echo(
            "The child's own agreement: not asked, which counts as no. When asked: cuebook "
            f"learner consent {made} use_for_ranking yes --given-by parent_guardian --assent yes"
        )
    if not ranking:
        click.echo(
            "Consent for ranking: not asked, which counts as no. "
            f"When asked: cuebook learner consent {made} use_for_ranking yes"
        )


@command.command("list")
@with_common_options
def list_all(location: str | None, as_json: bool) -> None:  # noqa: FBT001
    """List learners."""
    lines = people.list_learners(location)
    if as_json:
        print_json({"format": "cuebook.learners/1", "learners": to_plain(lines)})
        return
    for line in lines:
        click.echo(f"{line.code:<20} {line.note}")
    if not lines:
        click.echo("No learners yet. Add one: cuebook learner add")


@command.command("show")
@click.argument("code")
@with_common_options
def show(location: str | None, as_json: bool, code: str) -> None:  # noqa: FBT001
    """Show what is known of one learner."""
    learner = people.show_learner(location, code)
    if as_json:
        print_json({"format": "cuebook.learner/1", "learner": code, **to_plain(learner)})
        return
    click.echo("\n".join(learner.lines))


@command.command("consent")
@click.argument("code")
@click.argument("item")
@click.argument("answer")
@click.option("--given-by", default="self", show_default=True, help="Who gave it.")
@click.option("--how", default="spoken", show_default=True, help="spoken, written or shown.")
@click.option("--assent", help="For a child: did the child agree (yes, no, not_asked)?")
@with_common_options
def consent(
    location: str | None,
    as_json: bool,  # noqa: FBT001
    code: str,
    item: str,
    answer: str,
    given_by: str,
    how: str,
    assent: str | None,
) -> None:
    """Note an answer to one consent item; the newest counts, at once."""
    people.set_consent(location, code, item, answer, given_by=given_by, how=how, assent=assent)
    if as_json:
        print_json({"format": "cuebook.consent/1", "learner": code, "item": item, "answer": answer})
        return
    click.echo(f"{code}: {item} {answer}, given by {given_by}, {how}.")


@command.command("hold")
@click.argument("code")
@click.option("--task", "tasks", multiple=True, required=True, help="Tasks that are stopped.")
@click.option("--until", required=True, help="What must happen first.")
@click.option("--by", "by_role", required=True, help="Role of who may clear it.")
@with_common_options
def hold(
    location: str | None,
    as_json: bool,  # noqa: FBT001
    code: str,
    tasks: tuple[str, ...],
    until: str,
    by_role: str,
) -> None:
    """Put a learner on hold for tasks until somebody clears it; Cuebook never clears."""
    people.add_hold(location, code, tasks, until=until, by_role=by_role)
    if as_json:
        print_json({"format": "cuebook.hold/1", "learner": code, "tasks": list(tasks)})
        return
    click.echo(f"{code} is on hold for {', '.join(tasks)} until {until} (cleared by {by_role}).")


@command.command("clear")
@click.argument("code")
@click.option("--task", required=True, help="The task that is allowed again.")
@click.option("--by", "cleared_by", required=True, help="Role of who cleared it.")
@with_common_options
def clear(location: str | None, as_json: bool, code: str, task: str, cleared_by: str) -> None:  # noqa: FBT001
    """Note who cleared a hold. Cuebook records it; it clears nobody."""
    people.clear_hold(location, code, task, cleared_by=cleared_by)
    if as_json:
        print_json({"format": "cuebook.hold/1", "learner": code, "task": task, "cleared": True})
        return
    click.echo(f"{code}: {task} noted as cleared by {cleared_by}.")


@command.command("erase")
@click.argument("code")
@click.option("--yes", is_flag=True, help="Do it without asking again.")
@with_common_options
def erase(location: str | None, as_json: bool, code: str, yes: bool) -> None:  # noqa: FBT001
    """Erase a learner with sessions, recordings and free text."""
    people.erase_learner(location, code, confirmed=yes)
    if as_json:
        print_json({"format": "cuebook.erased/1", "learner": code})
        return
    click.echo(f"{code} and everything recorded of them is erased from this library.")
