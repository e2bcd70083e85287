"""Sentences about sweeps: (what is wrong, what would be right)."""

WORDS: dict[str, tuple[str, str]] = {
    "sweep-too-large": (
        "The sweep has {points} points; at most {most} are gone through.",
        "Narrow the ranges.",
    ),
    "sweep-one-pass": (
        "{option} has nothing to change: the spec has no [intermediate].",
        "Leave it out, or give the spec two passes.",
    ),
    "sweep-pinned": (
        "{option} has nothing to change: the spec's coefficients are pinned.",
        "Leave it out, or remove coefficient.pinned from the spec.",
    ),
    "sweep-exact": (
        '{option} has nothing to change: with scale = "exact" the taps are taken as they are.',
        'Leave it out, or set coefficient.scale to "binary".',
    ),
    "sweep-open": (
        "The spec leaves this word open, and the sweep does not go through it.",
        "Add {option} with a range.",
    ),
    "sweep-response": (
        "A response fit that is not pinned is a search of its own, too long for each point.",
        "Add --fit nearest, --fit gain or both; or pin the fit first.",
    ),
    "sweep-lost": (
        "The process that worked on point {index} was ended by {cause}, twice.",
        "Look for a limit on memory or time; the same command goes on where this one stopped.",
    ),
    "sweep-version": (
        "A worker of the cluster runs {got}, and this is {wanted}.",
        "Install the same version everywhere.",
    ),
    "journal-of-another": (
        "This is the journal of another sweep: of another spec, other ranges or another version.",
        "Name another file with --journal, or remove this one.",
    ),
    "journal-not-one": (
        "This is not the journal of a sweep.",
        "Name another file with --journal.",
    ),
    "journal-damaged": (
        "This line of the journal is no point of the sweep.",
        "Remove the file to begin anew.",
    ),
    "journal-busy": (
        "Another sweep is writing this journal.",
        "Wait until it has ended, or name another file with --journal.",
    ),
    "journal-failed": (
        "The journal cannot be read or written: {reason}.",
        "Name another file with --journal, where you may write.",
    ),
    "plot-format": (
        "{path} is no file that a plot is written to.",
        "End its name in {expected}.",
    ),
    "needs-matplotlib": (
        "A plot needs Matplotlib, which is not installed.",
        "Install it: pip install guardbit[report].",
    ),
    "needs-distributed": (
        "A cluster needs Dask's distributed engine, which is not installed.",
        "Install it: pip install guardbit[cluster].",
    ),
    "scheduler-unreachable": (
        "No scheduler answers at {address}: {reason}.",
        "Check the address, such as tcp://127.0.0.1:8786, and that the scheduler runs.",
    ),
    "scheduler-without-workers": (
        "The scheduler at {address} has no workers.",
        "Start some; the same command goes on where this one stopped.",
    ),
    "scheduler-failed": (
        "The work on the cluster at {address} failed: {reason}.",
        "Mend that; the same command goes on where this one stopped.",
    ),
}
