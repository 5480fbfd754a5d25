"""Errors that are not findings: what surrounds the tool is not as it must be."""


class EnvironmentProblem(Exception):
    """A missing system library, an unwritable file …; the message says what to do. Exit status 3."""


class UnusableProblem(Exception):
    """What was asked for cannot be done with what was given; the message says what is wrong. Exit status 2."""
