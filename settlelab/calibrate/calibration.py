"""The calibration of a drop table: ranking, fits, choice, card."""

from __future__ import annotations

from collections.abc import Iterable, Sequence
from dataclasses import dataclass, replace

import numpy as np
import pandas as pd
from numpy.typing import NDArray

from settlelab.calibrate.attenuation import attenuation_notes, expected_inputs
from settlelab.calibrate.carding import Origin, make_card
from settlelab.calibrate.choice import choose
from settlelab.calibrate.falls import published_law
from settlelab.calibrate.fit import LawFit, fit_form, judge_law
from settlelab.calibrate.form import FORMS, Form
from settlelab.calibrate.forms import build_form, recipe
from settlelab.calibrate.model import CalibratedFit, Calibration, FittedParameter
from settlelab.calibrate.observations import Observations, observe, particle_means, replicates
from settlelab.calibrate.profile import profile_intervals
from settlelab.calibrate.ranking import (
    Contender,
    by_particle,
    deviation,
    predictions,
    published_contender,
    rank,
    rank_by_group,
    squared_error,
)
from settlelab.calibrate.residuals import check_notes, influence, residual_checks
from settlelab.calibrate.validation import parameters_without
from settlelab.errors import FitError
from settlelab.physics.constants import BoolArray
from settlelab.physics.drag import DRAG, usable_methods
from settlelab.study.model import CalibrationChoice

__all__ = ["calibrate_drops"]

USUAL_SHAPES = ("sphericity", "corey_shape_factor")  # few candidates, so that none wins by luck
FEWEST_LOTS = 3  # from which whole lots are left out as well
ALIKE = 0.98  # correlation above which two parameters cannot be told apart
FAR_OFF = 4.0  # standard deviations at which a particle is named


@dataclass(frozen=True, slots=True, kw_only=True)
class _Fitted:
    """A form with its fit and how it does on the drops."""

    form: Form
    fit: LawFit
    contender: Contender


def calibrate_drops(
    drops: pd.DataFrame, choice: CalibrationChoice | None = None, *, origin: Origin | None = None
) -> Calibration:
    """Rank the published drag laws on a lab's drops, fit the calibrated forms, and choose honestly between them.

    Parameters
    ----------
    drops : DataFrame
        Columns of `Drop` in SI; accepted drops of cuttings count. Missing columns are taken as unknown.
    choice : CalibrationChoice, optional
        Descriptors and forms to use; where left out, sphericity and Corey shape factor, else whatever shape nearly
        all drops have, and every form.
    origin : Origin, optional
        Title, date and author for the card.

    Returns
    -------
    Calibration

    Raises
    ------
    FitError
        Fewer than three drops can be compared, or the choice names an unknown form or a descriptor that is not there.
    """
    choice = choice or CalibrationChoice()
    seen, aside = observe(drops, choice.descriptors)
    published, left_out = _published(seen)
    best = min(published, key=lambda contender: float(np.mean(by_particle(seen, squared_error(contender)))))
    averaged = particle_means(seen)
    means = expected_inputs(averaged)
    fitted, failed = _fit_all(_forms(choice, seen, best.name), seen, means)
    general = [(item.contender, len(item.form.parameters)) for item in fitted if _for_any_lot(item.form, choice)]
    verdict = choose(best, general, seen)
    contenders = [*published, *(item.contender for item in fitted)]
    ranking = rank(contenders, seen)
    taken = next((item for item in fitted if item.form.name == verdict.chosen), None)
    chosen = _profiled(_calibrated(taken, ranking, seen), taken.fit, means) if taken else None
    fits = tuple(chosen if chosen and item is taken else _calibrated(item, ranking, seen) for item in fitted)
    state = taken.fit if taken else judge_law(published_law(DRAG[best.name]), means)
    checks, moved = residual_checks(state, means), influence(taken.form, state, means) if taken else None
    return Calibration(
        ranking=ranking,
        ranking_by_group=rank_by_group(contenders, seen),
        predictions=predictions(contenders, seen),
        best_published=best.name,
        fits=fits,
        chosen=chosen,
        card=make_card(chosen, DRAG[best.name], state, ranking, seen, origin or Origin()),
        residual_checks=checks,
        influence=moved,
        left_out={**left_out, **failed},
        notes=(
            verdict.sentence,
            *_notes(ranking, best, chosen, state, means),
            *check_notes(verdict.chosen or best.name, checks, moved),
            *(f"{name} was not fitted: {reason}." for name, reason in failed.items() if choice.forms),
            *attenuation_notes(averaged),
            *aside,
        ),
    )


def _published(seen: Observations) -> tuple[list[Contender], dict[str, str]]:
    """The published laws against the drops, and why others are left out."""
    methods, left_out = usable_methods([name for name in seen.falls.descriptors if name != "lot"])
    return [published_contender(method, seen) for method in methods], left_out


def _forms(choice: CalibrationChoice, seen: Observations, best: str) -> list[Form]:
    """The forms to fit: each kind once, those with a descriptor once for each descriptor."""
    known = [name for name in seen.falls.descriptors if name not in ("lot", "density_ratio")]
    shapes = list(choice.descriptors) or [name for name in USUAL_SHAPES if name in known] or known
    lots = tuple(dict.fromkeys(seen.lot.tolist()))
    forms = []
    for kind in choice.forms or FORMS:
        if kind == "factor":
            forms.append(build_form(recipe(kind, base=best)))
        elif kind == "effective-sphericity":
            forms.append(build_form(recipe(kind)))
            if len(lots) > 1:
                forms.append(build_form(recipe(kind, lots=lots)))
        elif kind.endswith("-power"):
            forms += [build_form(recipe(kind, descriptor=name)) for name in shapes]
        else:
            forms.append(build_form(recipe(kind)))
    return forms


def _for_any_lot(form: Form, choice: CalibrationChoice) -> bool:
    """A law with a coefficient for each lot says nothing about the next lot: it is taken only where asked for."""
    return not form.recipe.lots or choice.forms == (form.recipe.kind,)


def _fit_all(forms: Iterable[Form], seen: Observations, means: Observations) -> tuple[list[_Fitted], dict[str, str]]:
    fitted, failed = [], {}
    for form in forms:
        if missing := [name for name in form.needs if name not in seen.falls.descriptors]:
            failed[form.name] = f"needs {' and '.join(missing)}"
            continue
        try:
            fit = fit_form(form, means)
        except FitError as error:
            failed[form.name] = str(error)
            continue
        fitted.append(_Fitted(form=form, fit=fit, contender=_contender(form, fit, seen, means)))
    return fitted, failed


def _contender(form: Form, fit: LawFit, seen: Observations, means: Observations) -> Contender:
    place = replicates(seen)
    without_particle = parameters_without(form, fit, means.particle)[:, place]
    cv_lot = None
    if len(np.unique(means.lot)) >= FEWEST_LOTS and not form.recipe.lots:
        lots = np.unique(means.lot, return_inverse=True)[1].reshape(-1)
        cv_lot = deviation(form.law(parameters_without(form, fit, lots)[:, place]), seen)
    return Contender(
        name=form.name,
        kind="calibrated",
        deviation=deviation(form.law(fit.values), seen),
        in_range=np.ones(len(seen.drop), dtype=np.bool_),
        cv_deviation=deviation(form.law(without_particle), seen),
        cv_lot_deviation=cv_lot,
        facts={"needs": ";".join(form.needs), "confirmed": True, "source": "these drops", "aicc": fit.aicc},
    )


def _calibrated(item: _Fitted, ranking: pd.DataFrame, seen: Observations) -> CalibratedFit:
    form, fit = item.form, item.fit
    row = ranking.set_index("method").loc[form.name]
    u = np.sqrt(np.diag(fit.covariance))
    parameters = tuple(
        FittedParameter(
            name=parameter.name,
            value=float(value),
            u=float(error),
            low=float(value - fit.coverage_factor * error),
            high=float(value + fit.coverage_factor * error),
            at_bound=bool(bound),
            meaning=parameter.meaning,
        )
        for parameter, value, error, bound in zip(form.parameters, fit.values, u, fit.at_bound, strict=True)
    )
    return CalibratedFit(
        form=form,
        parameters=parameters,
        covariance=fit.covariance,
        correlation=fit.covariance / np.outer(u, u),
        between_particles=float(np.sqrt(np.sum(fit.scatter**2))),
        repeatability=fit.repeatability,
        residual_scatter=fit.residual_scatter,
        degrees=fit.degrees,
        aicc=fit.aicc,
        rms_percent=float(row["rms_percent"]),
        cv_rms_percent=float(row["cv_rms_percent"]),
        drops=len(seen.drop),
        particles=len(np.unique(seen.particle)),
        warnings=_warnings(parameters, fit.covariance / np.outer(u, u)),
    )


def _profiled(chosen: CalibratedFit, fit: LawFit, means: Observations) -> CalibratedFit:
    """The chosen form with intervals by the profile of the likelihood, unless a parameter stands at a bound."""
    if np.any(fit.at_bound):
        return chosen
    ends = profile_intervals(chosen.form, fit, means).tolist()
    parameters = (replace(each, low=low, high=high) for each, (low, high) in zip(chosen.parameters, ends, strict=True))
    return replace(chosen, parameters=tuple(parameters))


def _warnings(parameters: Sequence[FittedParameter], correlation: NDArray[np.float64]) -> tuple[str, ...]:
    """What keeps a parameter from being taken at face value."""
    told = [
        f"{each.name} stands at a bound of the fit ({each.value:.3g}) and has no uncertainty"
        for each in parameters
        if each.at_bound
    ]
    for i, first in enumerate(parameters):
        for j, second in enumerate(parameters[:i]):
            if abs(correlation[i, j]) > ALIKE:
                told.append(
                    f"{second.name} and {first.name} cannot be told apart on these drops (correlation "
                    f"{correlation[i, j]:.2f}): their Reynolds numbers or shapes are too alike"
                )
    return tuple(told)


def _notes(
    ranking: pd.DataFrame, best: Contender, chosen: CalibratedFit | None, state: LawFit, means: Observations
) -> list[str]:
    """What a reader should know beside the verdict."""
    rows = ranking[(ranking["kind"] == "published") & ranking["as_good_as_best"] & (ranking["method"] != best.name)]
    notes = []
    if len(rows):
        notes.append(f"These drops cannot tell {best.name} apart from {', '.join(rows['method'])} (95 %).")
    if not best.facts["confirmed"]:
        notes.append(f"The formula of {best.name} is not confirmed against its source: settlelab methods says why.")
    if not np.all(best.in_range):
        outside = _count(int(np.sum(~best.in_range)), "drop")
        notes.append(f"{best.name} is used outside its stated range for {outside} of {len(best.in_range)}.")
    if chosen is not None:
        notes += [f"{chosen.name}: {warning}." for warning in chosen.warnings]
    far = np.abs(state.distance) > FAR_OFF
    notes += [_far_off(far, means)] if np.any(far) else []
    if not np.any(means.velocity_u):
        notes.append("No uncertainty of the velocities is stated: the scatter between particles alone weights the fit.")
    return notes


def _far_off(far: BoolArray, means: Observations) -> str:
    shown = ", ".join(str(number) for number in means.drop[far].tolist())
    return (
        f"Far from the law ({FAR_OFF:g} standard deviations and more; held down in the fit), look for a cause: the "
        f"particle of drop {shown}."
    )


def _count(number: int, noun: str) -> str:
    return f"{number} {noun}" if number == 1 else f"{number} {noun}s"
