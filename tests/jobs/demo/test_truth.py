from __future__ import annotations

import math

from cuebook.jobs.demo.people import list_members, read_learners
from cuebook.jobs.demo.truth import read_truth
from cuebook.vocabulary import load_vocabulary

TRUTH = read_truth()
CODES = {learner.code for learner in read_learners()}


def test_each_planted_truth_is_there() -> None:
    """The cases a ranking must not fall for each have a cue in the reach clinic."""
    roles = {cue.role for cue in TRUTH.cues.values() if cue.task == "reaching"}
    assert {
        "best",
        "null",
        "harmful",
        "trade",
        "regression_trap",
        "too_few",
        "one_learner",
    } <= roles


def test_truths_speak_of_known_tasks_latents_and_learners() -> None:
    """Every effect moves a latent of its task, and every learner named is one of the invented."""
    words = load_vocabulary()
    for latent in TRUTH.latents.values():
        assert words.task(latent.task)
        assert set(latent.base) <= CODES
    for cue in TRUTH.cues.values():
        moving = {latent.name for latent in TRUTH.list_latents(cue.task)}
        assert set(cue.effects) <= moving
        assert set(cue.learner_effects) <= CODES
        assert all(set(effects) <= moving for effects in cue.learner_effects.values())


def test_all_of_the_reach_clinic_practise_reaching() -> None:
    """Whatever their own goal, all eight reach, so that there is one goal to rank for."""
    members = {learner.code for learner in list_members("Quillgate")}
    assert set(TRUTH.latents["smoothness"].base) == members


def test_only_one_cue_is_clearly_best_without_a_price() -> None:
    """The best cue is smoothest and not slower; the trade cue is smoother and slower."""
    reaching = [cue for cue in TRUTH.cues.values() if cue.task == "reaching"]
    by_role = {cue.role: cue for cue in reaching}
    best, trade = by_role["best"], by_role["trade"]
    others = [cue.effects["smoothness"] for cue in reaching if cue.role not in {"best", "trade"}]
    assert best.effects["smoothness"] - max(others) >= 0.5
    assert best.effects["log_time"] <= 0.0
    assert trade.effects["smoothness"] > 0.5
    assert trade.effects["log_time"] > 0.1
    assert by_role["regression_trap"].effects["smoothness"] == 0.0
    assert by_role["harmful"].effects["smoothness"] < -0.5
    assert len(by_role["harmful"].pain_stops) == 2


def test_the_best_cue_can_be_told_by_arithmetic() -> None:
    """Some 21 uses against some 55 without a cue find the best cue in over nine of ten libraries.

    The reckoning is the one in the head of the file: a Gaussian model with known variances.
    """
    latent, best = TRUTH.latents["smoothness"], TRUTH.cues["cloth-along-the-table"]
    attempts = TRUTH.settings["quillgate"]["attempts_per_set"]
    own_answer = TRUTH.cue_learner_share * latent.attempt_sd
    noise, state = latent.attempt_sd**2 / attempts, latent.day_sd**2
    reliability = state / (state + noise)
    change = (noise + latent.set_sd**2) * (1 + reliability) + latent.response_sd**2
    error = change / 21 + own_answer**2 / 7 + change / 55
    worthwhile = 0.2 * latent.day_sd
    spread_of_cues = 0.4**2
    shrink = spread_of_cues / (spread_of_cues + error)
    posterior_sd = math.sqrt(shrink * error)
    distance = (shrink * best.effects["smoothness"] - worthwhile) / posterior_sd
    spread = shrink * math.sqrt(error) / posterior_sd
    power = 0.5 * math.erfc(-(distance - 1.2816) / spread / math.sqrt(2))
    assert power > 0.9


def test_train_into_station_is_planted_to_vanish() -> None:
    """Strongest at once among the rowing cues, and nothing of it kept."""
    rowing = [cue for cue in TRUTH.cues.values() if cue.task == "rowing_stroke"]
    train = TRUTH.cues["train-into-station"]
    assert min(rowing, key=lambda cue: cue.effects["log_cv"]) is train
    assert train.kept_share == 0.0
