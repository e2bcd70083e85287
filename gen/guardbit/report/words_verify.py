"""Sentences about building and checking compiled code."""

_FRAME = "{runner}, {case} ({size})"
_REPLAY = "reproducer: {reproducer}"

WORDS: dict[str, tuple[str, str]] = {
    "no-compiler": (
        "no C compiler is on this machine ({tried})",
        "Install one: {install}; or name one in CC",
    ),
    "compiler-not-working": (
        "CC names {command}, which is not a C compiler that works like gcc or clang",
        "Set CC to one that does, or unset it",
    ),
    "tool-failed": (
        "{command} cannot be used: {reason}",
        "Install it or mend that, and run the same command again",
    ),
    "child-failed": (
        "the process that calls the compiled code could not do its work: {reason}",
        "Check that the sources define the functions that the routine names",
    ),
    "sanitizer-not-starting": (
        "a program built with sanitizers does not start here: {reason}",
        "Use another compiler, by CC; the other rungs do not need it",
    ),
    "no-coverage-tool": (
        "no tool reads the execution counts of {compiler}",
        "Install gcov for gcc, or llvm-cov for clang",
    ),
    "compile-error": (
        "{message}",
        "The C has to compile without a warning under the strict flags",
    ),
    "link-failed": (
        "the objects do not link: {message}",
        "Define the functions that the routine names, each once",
    ),
    "harm-crash": (
        f"{_FRAME}: the call crashed ({{detail}}): it read or wrote outside its buffers, or worse",
        f"The sanitized rung names the line; {_REPLAY}",
    ),
    "harm-hang": (
        f"{_FRAME}: the call did not end ({{detail}})",
        f"Look for a loop whose end depends on the size; {_REPLAY}",
    ),
    "harm-wrote-outside": (
        f"{_FRAME}: something was written {{detail}}",
        f"Check strides, the output's size and the length of scratch; {_REPLAY}",
    ),
    "harm-changed-source": (
        f"{_FRAME}: the source image was changed",
        f"The routine may only read it; {_REPLAY}",
    ),
    "harm-unsettled": (
        f"{_FRAME}: the result depends on what the buffers held before, first at {{detail}}",
        f"Write scratch before it is read, and never read the destination; {_REPLAY}",
    ),
    "harm-sanitizer": (
        f"{_FRAME}: {{detail}}",
        f"This is undefined behaviour in C, whatever the result was; {_REPLAY}",
    ),
    "status-differs": (
        f"{_FRAME}: the status is {{got}}, not {{expected}}",
        f"Check the arguments in the contract's order; {_REPLAY}",
    ),
    "size-differs": (
        f"{_FRAME}: the output size is told as {{got}}, not {{expected}} pixels",
        f"Compare extent, step and phase; {_REPLAY}",
    ),
    "destination-touched": (
        f"{_FRAME}: the destination was written in a call that has to be refused ({{status}})",
        f"Check everything before the first write; {_REPLAY}",
    ),
    "output-differs": (
        f"{_FRAME}: row {{row}} column {{column}} channel {{channel}} is {{got}}, not "
        "{expected} ({position}; {count} of {of} values differ; it read {window})",
        f"What would give this: {{explains}}; {_REPLAY}",
    ),
    "witness-missed": (
        "the frame for the {end} value of {register} gives {got}, not {expected}",
        "This is a fault of guardbit: please report it with the spec",
    ),
    "reference-differs": (
        "{case}: two statements of the contract differ in the {what} at row {row} column "
        "{column}: {first} and {second}",
        "This is a fault of guardbit: please report it with the spec",
    ),
    "probe-harm": (
        "{runner}: the requantiser came to harm ({harm}) at argument {argument}: {detail}",
        "It has to be defined for every value that reaches it",
    ),
    "requantiser-differs": (
        "{runner}: the requantiser makes {got} of {argument}, not {expected}",
        "Compare rounding, shift, pedestal and limits",
    ),
}
