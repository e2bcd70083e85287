"""A command without specs that cannot be done: its findings, for a person or a machine."""

from guardbit.cli.machine import document, finding_entry
from guardbit.cli.session import Session
from guardbit.model.finding import GuardbitError


def show_failure(session: Session, command: str, error: GuardbitError) -> int:
    """Show the findings of `error` and return the exit status that they call for."""
    from guardbit.report.terminal import finding_line

    if session.json:
        findings = [finding_entry(each) for each in error.findings]
        session.out(document(command, error.status, findings=findings))
    else:
        for found in error.findings:
            session.err(finding_line(session.err_look, found))
    return error.status
