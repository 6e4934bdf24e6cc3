"""`pairrules waive`: write down that a finding is lived with, why, and until when."""

from __future__ import annotations

import glob
from dataclasses import replace
from datetime import date
from pathlib import Path

import click

from pairrules.checks.rule import all_rules
from pairrules.cli.options import as_date, settings_option, step_option, today_option
from pairrules.cli.output import ToWrite, write_files
from pairrules.cli.progress import ProgressLine
from pairrules.errors import SettingsError, UsageError
from pairrules.pipeline import check, waiver_file_of
from pairrules.reports.safe_text import safe
from pairrules.result import PairResult, Result
from pairrules.settings.faults import Faults, nearest
from pairrules.settings.nodes import LONGEST_TEXT
from pairrules.settings.waiver_text import with_waiver
from pairrules.settings.waivers import Waiver, read_waivers, waivers_text

_BY_HAND = "write the waiver into the file by hand"


@click.command(name="waive")
@click.argument("board")
@click.option("--rule", required=True, metavar="RULE", help="The rule whose finding is waived.")
@click.option("--pair", required=True, metavar="PAIR", help="The pair's name, or one of its nets.")
@click.option("--reason", required=True, metavar="TEXT", help="Why the finding is lived with.")
@click.option("--until", required=True, metavar="YYYY-MM-DD", callback=as_date, help="The last day it holds.")
@click.option("--who", default="", metavar="TEXT", help="Whose decision it is.")
@settings_option
@step_option
@today_option
def command(
    *,
    board: str,
    rule: str,
    pair: str,
    reason: str,
    until: date,
    who: str,
    settings: str | None,
    step: str,
    today: date | None,
) -> None:
    """Waive the findings of RULE on a pair of BOARD, as long as its copper stays as it is.

    The waiver goes into the file the settings name, else into pairrules-waivers.yaml beside the settings or the board.
    Where the rule is already waived for the pair, that waiver is renewed.
    """
    rules = all_rules()
    if rule not in rules:
        raise UsageError(f"--rule {rule!r} is no rule", remedy=nearest(rule, rules))
    reason, who = _one_line("--reason", reason), _one_line("--who", who)
    if not reason:
        raise UsageError("--reason is empty", remedy="say why the finding is lived with")
    if until < (today or date.today()):
        raise UsageError(f"--until {until.isoformat()} is past", remedy="give a day to come")
    with ProgressLine() as progress:
        result = check(board, settings, pairs=glob.escape(pair), step=step, today=today, progress=progress)
    found = _pair(result, pair)
    mark = _fingerprint(result, found, rule)
    target = waiver_file_of(board, settings)
    new = Waiver(rule=rule, pair=(pair,), reason=reason, who=who, until=until, fingerprint=mark)
    changed = _write(target, new, found, rules=tuple(rules))
    what = f"{rule} of {safe(found.name)} is waived{'' if changed else ' as before'} until {until.isoformat()}"
    click.echo(f"{safe(str(target))}: {what}")


def _one_line(option: str, text: str) -> str:
    text = " ".join(text.split())
    if len(text) > LONGEST_TEXT:
        raise UsageError(f"{option} has {len(text)} characters", remedy=f"keep it within {LONGEST_TEXT}")
    if not text.isprintable():
        raise UsageError(f"{option} holds a character that cannot be printed", remedy="leave it out")
    return text


def _pair(result: Result, pair: str) -> PairResult:
    named = [one for one in result.pairs if one.name == pair]
    found = named or [one for one in result.pairs if pair in (*one.nets_plus, *one.nets_minus)]
    if len(found) != 1:
        names = ", ".join(one.name for one in found) or "none"
        raise UsageError(
            f"--pair {pair!r} is of {len(found)} pairs ({names})", file=result.board.file, remedy="give one pair's name"
        )
    return found[0]


def _fingerprint(result: Result, pair: PairResult, rule: str) -> str:
    mark = next((finding.fingerprint for finding in pair.findings if finding.rule == rule), "")
    if mark:
        return mark
    missing = next((one.missing for one in pair.unjudged if one.rule == rule), None)
    if missing is not None:
        raise UsageError(
            f"{rule} is undecided for {pair.name}: {missing}",
            file=result.board.file,
            remedy="only a finding can be waived",
        )
    others = sorted({finding.rule for finding in pair.findings})
    raise UsageError(
        f"{pair.name} has no finding of {rule}",
        file=result.board.file,
        remedy=f"it has findings of {', '.join(others)}" if others else "nothing is to be waived",
    )


def _write(target: Path, new: Waiver, pair: PairResult, *, rules: tuple[str, ...]) -> bool:
    """Write the waiver; whether the file is another than before."""
    faults = Faults(str(target))
    text = waivers_text(target, faults)
    faults.raise_if_any()
    assert text is not None
    before = read_waivers(target, rules=rules, text=text)
    own = [
        i
        for i, one in enumerate(before)
        if one.rule == new.rule and one.means(pair.name, pair.nets_plus, pair.nets_minus)
    ]
    if len(own) > 1:
        lines = " and ".join(str(before[i].line) for i in own)
        raise UsageError(
            f"lines {lines} both waive {new.rule} of {pair.name}", file=str(target), remedy="keep one of them"
        )
    place = own[0] if own else None
    if place is not None:
        old = before[place]
        new = replace(new, pair=old.pair, who=new.who or old.who)
    wanted = [replace(one, line=0) for one in before]
    if place is None:
        wanted.append(new)
    else:
        wanted[place] = new
    written = with_waiver(text, new, place)
    if written == text:
        return False
    _check(target, written, wanted, rules)
    write_files([ToWrite(written, str(target), "the waiver file")])
    return True


def _check(target: Path, written: str, wanted: list[Waiver], rules: tuple[str, ...]) -> None:
    """What is written must be read again as what is meant; a file may be laid out in ways no edit foresees."""
    try:
        read = [replace(one, line=0) for one in read_waivers(target, rules=rules, text=written)]
    except SettingsError:
        read = []
    if read != wanted:
        raise UsageError("the file is laid out in a way that cannot be edited here", file=str(target), remedy=_BY_HAND)
