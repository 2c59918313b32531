"""The situations of the proposal in words, and when they hold."""

from __future__ import annotations

from labstat.judgement.case import Case, finding_of, is_beyond, is_within, those
from labstat.judgement.findings import FEWEST_NEAR, Question
from labstat.judgement.phrases import provided
from labstat.judgement.wording import allowed, counted, evidence, finding_decimals, listing, number, some

Questions = tuple[Question, ...]


def beyond_words(case: Case, questions: Questions) -> str:
    said = []
    for q in questions[:3]:
        finding = finding_of(q)
        symmetric = finding.allowed_low is not None and finding.allowed_low == -(finding.allowed_high or 0.0)
        verb = "exceeds the allowed" if symmetric else "lies outside the allowed"
        said.append(f"at {case.at([q])} the bias, {evidence(finding, case.decimals)}, {verb} {allowed(finding)}")
    return "; ".join(said) + more(case, questions)


def more(case: Case, questions: Questions) -> str:
    return f"; likewise at {case.at(questions[3:])}" if len(questions) > 3 else ""


def beyond_says(case: Case, questions: Questions) -> str:
    return f"The evidence speaks against acceptance: {beyond_words(case, questions)}"


def stop_reason(case: Case) -> str:
    parts = []
    for scene in case.stops:
        name = f"{scene.result.data.candidate}: " if len(case.stops) + len(case.missing) > 1 else ""
        parts.append(f"{name}{counted(scene.result.n, 'specimen')}, {scene.asked.minimum_n} needed")
    parts += [f"{part.where}: {part.reason}" if part.where else part.reason for part in case.missing]
    return "; ".join(parts)


def beyond_and_stop(case: Case) -> Questions | None:
    stopped_results = [scene.result for scene in case.stops]
    return those([q for q in case.questions if q.result in stopped_results], is_beyond)


def beyond_stop_says(case: Case, questions: Questions) -> str:
    counts = listing(f"{scene.result.n} of {scene.asked.minimum_n}" for scene in case.stops)
    return (
        f"Too few specimens for a proposal ({counts}), but what there is already exceeds the allowance: "
        f"{beyond_words(case, questions)}"
    )


def stop(case: Case) -> Questions | None:
    return () if case.stops or case.missing else None


def stop_says(case: Case, questions: Questions) -> str:
    return f"No proposal on agreement: {stop_reason(case)}"


def not_covered_says(case: Case, questions: Questions) -> str:
    said = []
    for q in questions[:3]:
        low, high = (number(end, case.decimals) for end in q.result.range)
        at = q.level.level.at
        if q.level.covered:
            why = f"results outside a measuring interval lie within a factor of two ({some(q.level.censored_near)})"
        else:
            why = f"specimens end at {high}" if at > q.result.range[1] else f"specimens begin at {low}"
        said.append(f"at {case.at([q])}: {why}")
    remedy = "restrict the measuring interval or add specimens there"
    return f"Agreement is not shown {'; '.join(said)}{more(case, questions)}; {remedy}"


def inside_says(case: Case, questions: Questions) -> str:
    return "Not settled " + "; ".join(inside_words(case, q) for q in questions[:3]) + more(case, questions)


def inside_words(case: Case, question: Question) -> str:
    finding = finding_of(question)
    start = f"at {case.at([question])}: the bias is {evidence(finding, case.decimals)}"
    low, high, bottom, top = finding.low, finding.high, finding.allowed_low, finding.allowed_high
    if low is None or high is None or bottom is None or top is None:
        return f"{start}, and without an interval nothing is settled"
    if bottom <= low and high <= top:
        near = counted(question.level.near, "specimen")
        return f"{start}, allowed {allowed(finding)}, but {near} within 25 % of the level, {FEWEST_NEAR} needed"
    worst = high if high - top >= bottom - low else low
    size = f"may be as large as {number(worst, finding_decimals(finding, case.decimals))}, allowed {allowed(finding)}"
    if finding.settles_at_n is None:
        return f"{start} and {size}; to settle it would probably take more than 500 specimens"
    return f"{start} and {size}; about {finding.settles_at_n} specimens in all would probably settle it (a rough guide)"


def outside_says(case: Case, questions: Questions) -> str:
    said = "; ".join(
        f"at {case.at([q])} the bias, {evidence(finding_of(q), case.decimals)}, allowed {allowed(finding_of(q))}"
        for q in questions[:3]
    )
    return (
        f"More likely outside the allowance than inside: {said}{more(case, questions)}; more specimens are unlikely "
        "to rescue it"
    )


def rests_says(case: Case, questions: Questions) -> str:
    said = "; ".join(
        f"at {case.at([q])} the finding {finding.finding} {finding.rests_on}"
        for q in questions[:3]
        for finding in (finding_of(q),)
    )
    return f"Investigate before deciding: {said}{more(case, questions)}"


def within_says(case: Case, questions: Questions) -> str:
    comparative = questions[0].result.data.comparative
    return f"The evidence supports acceptance on agreement with {comparative} at {case.at(questions)}"


def within_cautions_says(case: Case, questions: Questions) -> str:
    return f"{within_says(case, questions)}, provided the reviewer is satisfied about {provided(case.cautions)}"


def partly(case: Case) -> Questions | None:
    within = those(case.asked, is_within)
    return within if within is not None and len(within) < len(case.asked) else None


def partly_says(case: Case, questions: Questions) -> str:
    start = f"Within at {case.at(questions)} only"
    heavy = provided(case.cautions)
    return f"{start}, provided the reviewer is satisfied about {heavy}" if heavy else start


def within_with_cautions(case: Case) -> Questions | None:
    return those(case.asked, is_within) if provided(case.cautions) else None


def always(case: Case) -> Questions | None:
    return ()


def no_criterion_says(case: Case, questions: Questions) -> str:
    if case.questions:
        return f"Estimates only at {case.at(case.questions)}: the plan has no criterion"
    return "Estimates only: the plan has no criterion"


def no_reference(case: Case) -> Questions | None:
    """A reference study alone, and no limits for anyone."""
    alone = case.study.data.plan.comparison is None
    none = all(group.group.limits.lower is None and group.group.limits.upper is None for group in case.groups)
    return () if alone and none else None


def no_reference_says(case: Case, questions: Questions) -> str:
    return "No proposal on reference limits"


def add_near(case: Case, questions: Questions) -> str:
    if any(q.level.near < FEWEST_NEAR for q in questions):
        return f"add specimens near {case.at([q for q in questions if q.level.near < FEWEST_NEAR])}"
    sizes = [finding_of(q).settles_at_n for q in questions]
    if None in sizes:
        return "many more specimens, or accept as not settled"
    return f"about {max(size for size in sizes if size is not None)} specimens in all"
