"""What each reason says and what to do about it: the one place of these sentences.

A code stays for ever, a sentence may be rewritten. ``say`` fills a sentence with its
values and puts citation and basis beside it.
"""

from __future__ import annotations

from bottles.rules.edition import Cited
from shop.rules.reason import Reason, Severity, Value

SENTENCES: dict[str, tuple[str, str]] = {
    # dates
    "due-date": (
        "{test} {last} + {interval} = due {due}.",
        "",
    ),
    "due-shortened": (
        "A stricter interval of {interval} holds here.",
        "",
    ),
    "in-due-month": (
        "Due this month ({due}): may be filled until {last_day}.",
        "Send it for its {test} now.",
    ),
    "due-month-stopped": (
        "Due this month ({due}): by the month rule in force it is not filled from the first day.",
        "Use up what it holds, then send it for its {test}.",
    ),
    "year-only-due": (
        "Only a year is stamped ({last}): it counts as due on 1 January {year}, and is not filled from that day.",
        "Use up what it holds, then send it for its {test}.",
    ),
    "overdue": (
        "Past its test month: {test} was due {due}. Not filled, not topped up.",
        "Use up what it holds, then send it to a {house}.",
    ),
    "source-when-overdue": (
        "It was filled before it fell due: it may be used until empty.",
        "",
    ),
    "due-at-once": (
        "A condition noted makes it due at once, whatever its stamp says.",
        "Have it examined by a {house}.",
    ),
    "no-test-asked": ("No periodic test is asked of {mark}.", "Look it over before each fill."),
    "service-life-over": (
        "Its service life ended {end}. No retest revives it.",
        "Take it out of use; have it emptied and condemned by a {house}.",
    ),
    "service-life-ends": ("Its service life ends {end}; that month is still inside.", ""),
    "star-kept": ("Star after its last test: {interval} while its conditions are kept.", ""),
    "star-fallback": (
        "Star after its last test: {kept} while its conditions are kept, {fallback} if not.",
        "Say whether every fill was out of rack and vehicle and with the hammer test.",
    ),
    "star-broken": (
        "The star's conditions were not kept: {interval} from the marked test date ({fallback}).",
        "Have the star removed by a {house} at the next test.",
    ),
    "star-not-for-mark": (
        "A star means nothing on {mark}: the ordinary interval holds.",
        "Read the stamp again.",
    ),
    "star-too-old": (
        "A star needs a bottle made after 1945: the ordinary interval holds.",
        "Read the stamp of manufacture again.",
    ),
    "plus-no-effect": ("The plus after its stamp does nothing for nitrous oxide.", ""),
    "permit-governs": (
        "Its special permit sets interval and service life; {interval} is only the usual figure.",
        "Read the permit and enter its interval.",
    ),
    # what can't be judged
    "mark-unknown": (
        "The mark {mark} isn't in the list of specifications.",
        "Read it off the metal again; ask your authority if it stands there so.",
    ),
    "no-row-for-mark": (
        "{edition} has no row for {mark}: it can't be judged here.",
        "Ask your authority, or choose the mark that these rules know.",
    ),
    "wall-needed": (
        "{mark} alone doesn't say how it is made, and the interval depends on it.",
        "Enter steel, aluminium or composite.",
    ),
    "no-interval": ("No interval is known for {mark} with nitrous oxide.", ""),
    "no-stamp-read": (
        "Neither a test nor a manufacture stamp has been read.",
        "Read the stamps off the metal.",
    ),
    "stamp-without-month": (
        "The stamp {last} has no month; these rules need one for this bottle.",
        "Read the stamp again; without a month it goes to a {house}.",
    ),
    "test-before-manufacture": (
        "The test {last} is before its manufacture {made}: one of them is misread.",
        "Read both stamps again.",
    ),
    "test-after-day": (
        "The stamp {last} is later than the day asked.",
        "Read the stamp again.",
    ),
    # never a receiver
    "not-refillable": (
        "{mark} is made to be used once: never refilled.",
        "Send it back or scrap it.",
    ),
    "not-on-the-row": (
        "{mark} is a low-pressure bottle: not allowed for nitrous oxide.",
        "Take it out of nitrous use.",
    ),
    "foreign-mark": (
        "{mark} is not allowed to be filled under {edition}.",
        "Return it to its owner unfilled.",
    ),
    "aircraft-only": ("{mark} is for aircraft use only.", "Return it to its owner unfilled."),
    "service-pressure-too-low": (
        "Stamped {stamped}; nitrous oxide needs at least {least}.",
        "Never fill it with nitrous oxide.",
    ),
    "test-pressure-too-low": (
        "Test pressure {stamped}; nitrous oxide needs at least {least}.",
        "Never fill it with nitrous oxide.",
    ),
    "pressure-not-read": (
        "The pressure of the mark {mark} is missing.",
        "Read the whole mark off the metal.",
    ),
    "marks-illegible": (
        "Its mark, serial or test stamp can't be read.",
        "Send it to a {house} to be identified.",
    ),
    "no-tare": ("Its tare isn't known.", "Weigh it empty and record what is on it."),
    "no-capacity": (
        "Its water capacity isn't known.",
        "Read it off the metal, or enter the labelled size.",
    ),
    "suppliers-bottle": (
        "The gas supplier's bottle: never filled nor sent for test here.",
        "Swap it at the supplier.",
    ),
    "permit-excludes-nitrous": (
        "Its permit {mark} does not list nitrous oxide.",
        "Never fill it with nitrous oxide.",
    ),
    "permit-expired": ("Its permit expired on {expired}.", "Ask for the renewed permit."),
    "no-consent": (
        "Its owner has not agreed to its being filled here.",
        "Ask the owner in writing.",
    ),
    "visual-overdue": (
        "Its visual inspection is past {due} (shop rule).",
        "Have it inspected before filling.",
    ),
    "at-its-limit": (
        "It holds {net} g of at most {limit} g: full.",
        "Nothing to add.",
    ),
    "over-its-limit": (
        "It holds {net} g, more than its limit of {limit} g: overfull.",
        "Keep it cool, vent outdoors down to the limit, weigh again.",
    ),
    # neither
    "condemned": ("It is condemned: for good.", "Keep it out of use; its number never returns."),
    "condition": (
        "Noted: {condition}. Not filled and not emptied into another.",
        "Tag it, set it aside, send it to a {house}; do not repair it here.",
    ),
    "heat-aluminium": (
        "Overheated aluminium is condemned whatever it looks like.",
        "Have it condemned by a {house}.",
    ),
    "clean-first": ("Noted: {condition}.", "Clean and dry it oxygen-clean, then look again."),
    "contents-unknown": (
        "What it last held isn't known.",
        "Empty, purge and inspect it by someone trained before any use.",
    ),
    "contents-other": (
        "It last held something other than nitrous oxide.",
        "Have it cleaned for nitrous oxide by a {house}.",
    ),
    "in-open-refill": (
        "It is in a refill that is still open.",
        "Finish or abandon that refill first.",
    ),
    # first
    "dry-and-purge": (
        "Found open or without pressure: moisture and air may be inside.",
        "Dry and purge it by the shop's steps.",
    ),
    "look-owed": ("The look before this fill is owed.", "Go through the short checklist."),
    "star-check-owed": ("Its star asks for the hammer test, out of rack and vehicle.", "Do both."),
    # warns
    "disc-overdue": ("Its safety disc is past {due} (shop rule).", "Have the disc replaced."),
    "alloy-6351": (
        "Alloy 6351: known to crack slowly at the neck.",
        "Ask the {house} for an eddy current check.",
    ),
    "customers-contents": (
        "What it holds belongs to its owner.",
        "Draw from it only with the owner's word.",
    ),
    "nothing-inside": ("Nothing is left inside by its last weighing.", ""),
    "within-plus-minus": (
        "Within the scale's ± of its limit: {net} ± {plus_minus} g of {limit} g.",
        "Weigh it again on the finer scale.",
    ),
    # registering
    "charge-above-capacity": (
        "The charge of {charge} g is more than its capacity allows ({limit} g).",
        "Read capacity and charge again.",
    ),
    "capacity-inferred": (
        "Capacity of {capacity} mL inferred from the labelled charge of {charge} g.",
        "Replace it by the capacity read off the metal.",
    ),
    "tare-implausible": (
        "A tare of {tare} g for {capacity} mL is outside what such bottles weigh ({least} to {most} g).",
        "Check tare and capacity.",
    ),
    "star-on-aluminium": ("Aluminium is never star-marked.", "Read the stamp again."),
    "star-too-large": (
        "A star is for bottles of at most 56.7 kg of water.",
        "Read capacity and stamp again.",
    ),
    "wall-contradicts-mark": (
        "{mark} is {expected}, but {wall} was entered.",
        "Check the mark and the wall.",
    ),
    "permit-missing": (
        "{mark} is filled under a permit only; none is entered.",
        "Enter its number, its expiry and whether it lists nitrous oxide.",
    ),
    "life-before-manufacture": (
        "The service life ends {end}, before its manufacture {made}.",
        "Read both again.",
    ),
    "composite-without-life": (
        "A composite bottle has a service life; its end is missing.",
        "Read the end of life off the label or the permit.",
    ),
}

NOT_GIVEN: dict[str, tuple[str, str]] = {
    "mark": ("its specification mark", "Read the mark off the metal."),
    "tare": ("its tare", "Weigh it empty and record what is on it."),
    "capacity": ("its water capacity", "Read it off the metal."),
    "net": ("what it holds now: not weighed here since it came, which is unknown, not empty", "Weigh it."),
    "owner": ("whose bottle it is", "Ask whose it is."),
    "consent": ("whether its owner agrees", "Ask the owner, and note the answer."),
    "contents": ("what it last held", "Ask and check the label; if nobody knows, say unknown."),
    "conditions": ("its condition", "Look it over."),
    "condemned": ("whether it is condemned", "Look for a condemned mark."),
    "marks": ("whether mark, serial and stamp are legible", "Read them off the metal."),
    "pressure kept": (
        "whether it kept its pressure",
        "Try whether there is pressure behind the valve.",
    ),
    "open refill": ("whether it is in another refill", "Look on the stations."),
    "visual": ("its last visual inspection", "Inspect it, or enter the date."),
    "disc": ("the date of its safety disc", "Read the disc's date."),
    "service life": ("the end of its service life", "Read the end of life off the label."),
    "permit": ("whether its permit lists nitrous oxide", "Read the permit's list of gases."),
    "permit expiry": ("until when its permit is valid", "Read the permit's expiry."),
    "star kept": ("whether the star's conditions were kept", "Ask how it was filled."),
}


def say(
    code: str,
    severity: Severity,
    source: Cited,
    *about: str,
    **values: Value,
) -> Reason:
    """The reason of a code, its sentence filled with the values."""
    sentence, next_step = SENTENCES[code]
    return Reason(
        code=code,
        severity=severity,
        sentence=sentence.format(**values),
        next_step=next_step.format(**values),
        citation=source.citation,
        basis=source.basis,
        about=about,
        values=tuple(values.items()),
    )


def not_given(what: str, source: Cited, *about: str) -> Reason:
    """The reason of a fact that nobody gave: to be read, weighed or asked first."""
    name, next_step = NOT_GIVEN[what]
    return Reason(
        code=f"{what.replace(' ', '-')}-not-given",
        severity="first",
        sentence=f"Not known: {name}.",
        next_step=next_step,
        citation=source.citation,
        basis=source.basis,
        about=about,
    )
