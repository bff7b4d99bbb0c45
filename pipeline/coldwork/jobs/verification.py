"""Testers whose bias is that of their daily checks: read, and put into the method."""

from collections.abc import Iterator, Sequence
from dataclasses import replace
from datetime import date

from coldwork import contracts
from coldwork.errors import BatchRefused, Cause, InvalidArgument
from coldwork.inputs.document import with_testers
from coldwork.inputs.method import DayCheck, Method, Tester
from coldwork.intake.files import SourceFile, TableFiles
from coldwork.intake.sources import check_headers
from coldwork.intake.verification import Checks, read_verification
from coldwork.statistics.tester_checks import Check, bias_of_tester

__all__ = ["verified"]


def verified(method: Method) -> tuple[Method, tuple[SourceFile, ...]]:
    """Take the bias of testers from their daily checks, where the sheet says so.

    Parameters
    ----------
    method : Method
        From `read_method`.

    Returns
    -------
    Method
        With bias, uncertainty and days of check of every such tester.
    tuple of SourceFile
        What was read; nothing where no tester asks for it.

    Raises
    ------
    BatchRefused
        If the table cannot be used, or a tester has no check in it.
    """
    if not method.verification:
        return method, ()
    files = TableFiles(
        contracts.load("in/verification"),
        method.folder,
        method.verification,
        method.layouts.get("verification", ()),
    )
    causes = check_headers(files)
    if causes:
        raise BatchRefused(str(method.folder), causes)
    checks, sources = read_verification(files, method.timezone)
    causes = list(_lacking(method, checks, files.names[0]))
    if causes:
        raise BatchRefused(str(method.folder), causes)
    testers = tuple(
        _checked(tester, checks[tester.id]) if tester.checked else tester
        for tester in method.testers
    )
    biases = {tester.bias.name: tester.bias for tester in testers}
    found = replace(
        method,
        testers=testers,
        inputs={**method.inputs, **biases},
        document=with_testers(method.document, testers),
    )
    return found, sources


def _lacking(method: Method, checks: Checks, name: str) -> Iterator[Cause]:
    for tester in method.testers:
        if not tester.checked:
            continue
        try:
            bias_of_tester([check for _, check in checks.get(tester.id, [])])
        except InvalidArgument as error:
            yield Cause(
                f"{name}, tester {tester.id}",
                str(error),
                "Its bias is to come from its checks.",
                "Add its readings on a block, or give bias_rel and u_rel.",
            )


def _checked(tester: Tester, checks: Sequence[tuple[date, Check]]) -> Tester:
    found = bias_of_tester([check for _, check in checks])
    bias = replace(
        tester.bias,
        value=found.bias,
        u=found.u,
        degrees_of_freedom=found.degrees_of_freedom,
        source=f"daily checks, {len(checks)} of them",
    )
    days = tuple(DayCheck(day, _within(tester, check)) for day, check in checks)
    return replace(tester, bias=bias, checks=days)


def _within(tester: Tester, check: Check) -> bool:
    near = abs(check.bias) <= tester.max_bias
    return near and check.repeatability <= tester.max_repeatability
