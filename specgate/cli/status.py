"""Exit statuses. Held gate, unusable input, unfit environment and a broken tool are never mistaken for each other."""

PASSES = 0
HOLDS = 1
UNUSABLE = 2
ENVIRONMENT = 3
BROKEN = 70
INTERRUPTED = 130
PIPE_CLOSED = 141

EXPLAINED = """\
exit status:
  0    the gate passes (or the command did what was asked)
  1    the gate holds: something is not compliant, or not sound, or an error was found
  2    the input or the call is unusable; every reason is printed with file:line:column
  3    the environment is unfit: a missing system library, a file that cannot be written
  70   specgate itself broke; please report it"""
