"""Errors that are not findings: what surrounds the tool is not as it must be."""


class EnvironmentProblem(Exception):
    """A missing system library, an unwritable file …; the message says what to do. Exit status 3."""
