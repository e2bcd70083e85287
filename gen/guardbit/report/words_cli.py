"""Sentences about calls, certificates, and faults of guardbit itself: (reason, remedy)."""

WORDS: dict[str, tuple[str, str]] = {
    "against-folder": (
        "{name} is included from another folder",
        "Put the headers beside the C file",
    ),
    "against-unread": (
        "{name} cannot be read ({reason})",
        "Name a C file; what it includes by name has to lie beside it",
    ),
    "against-function": (
        '"{got}" is no name of a C function',
        "Name the function that filters a frame with --function",
    ),
    "against-argument": (
        '"{got}" is not what an argument can be',
        "Name each argument's role ({known}), or give a whole number",
    ),
    "against-arguments": (
        "{got}: src and dst have to be among the arguments, and none of them twice",
        "Name the roles of all arguments of the function, in its order",
    ),
    "same-name": (
        "The filter is called {name}, as the one in {other} is, and both would write the "
        "same files.",
        "Rename one of them, or write them into two folders by two calls.",
    ),
    "output-edited": (
        "{path} was edited since guardbit wrote it, and would be lost.",
        "Keep a copy of it, or pass --force to overwrite it.",
    ),
    "output-unknown": (
        "{path} is there already and no certificate beside it says that guardbit wrote it.",
        "Choose another folder, or pass --force to overwrite it.",
    ),
    "spec-changed": (
        "It was changed while guardbit worked on it, so that nothing was written into it.",
        "Run the command again.",
    ),
    "certificate-syntax": (
        "Not a certificate: {reason}.",
        "Write it again with guardbit emit --force.",
    ),
    "certificate-not-one": (
        "The JSON in it is not a certificate of guardbit.",
        "Name a file NAME.cert.json that guardbit emit wrote.",
    ),
    "certificate-schema": (
        "Its layout is number {found}, and this version reads number {known}.",
        "Write it again with guardbit emit.",
    ),
    "certificate-changed": (
        "Something in it was changed after it was written: its seal does not match.",
        "Write it again with guardbit emit --force.",
    ),
    "starter-exists": (
        "{path} is there already.",
        "Choose another file with -o, or remove it first.",
    ),
    "error-beyond-bound": (
        "Frame {frame}: outputs are from {least} to {greatest} LSB from the ideal code, beyond the "
        "bound from {low} to {high}.",
        "This is a fault of guardbit: please report it with the spec.",
    ),
    "selfcheck-too-large": (
        "The smallest legal image, {size}, is too large for the self-check program to carry.",
        "Let image.width or image.height begin at a smaller size.",
    ),
    "no-memory": (
        "The work ran out of memory.",
        "Run fewer specs at a time with --jobs 1, or allow more memory.",
    ),
    "machine-refused": (
        "The system refused something: {reason}.",
        "Mend that and run the same command again.",
    ),
    "worker-lost": (
        "The process that worked on this spec was ended by {cause}.",
        "Run this spec alone; if it happens again, look for a limit on memory or time.",
    ),
    "output-failed": (
        "The output could not be written: {reason}.",
        "Free some space or write it elsewhere, and run the same command again.",
    ),
    "fault": (
        "This is a fault in guardbit: {what}.",
        "Run the same command with GUARDBIT_DEBUG=1 to see where, and report it.",
    ),
}
