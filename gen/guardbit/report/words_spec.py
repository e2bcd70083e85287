"""Sentences for what reading a spec and its files finds: (what is wrong, what would be right)."""

_FILES: dict[str, tuple[str, str]] = {
    "file-missing": ("There is no file {path}.", "Check the name and the folder."),
    "file-is-folder": ("{path} is a folder.", "Name a file in it."),
    "file-not-regular": (
        "{path} is a device, pipe or socket.",
        "Save what it gives in a file, and name that.",
    ),
    "file-unreadable": (
        "{path} cannot be read: {reason}.",
        "Look at its permissions and at the disk.",
    ),
    "file-too-large": (
        "{path} has {size} bytes; at most {limit} are read.",
        "Name a smaller file.",
    ),
    "file-bom": (
        "{path} begins with a byte-order mark.",
        "Save it as UTF-8 without a byte-order mark (BOM).",
    ),
    "file-nul": ("{path} holds a NUL byte.", "Save it as plain UTF-8 text."),
    "file-not-utf8": (
        "{path} is not UTF-8: byte {byte} at offset {offset}.",
        "Save it as UTF-8.",
    ),
    "path-empty": ("The path is empty.", "Name a file."),
    "path-nul": (
        "The path {path} holds a character that no path can hold.",
        "Name an existing file.",
    ),
    "path-absolute": (
        "The path {path} is absolute, so the spec would work on one machine only.",
        "Put the file beside the spec, or below its folder, and name it from there.",
    ),
    "path-backslash": ("The path {path} holds a backslash.", "Separate folders with /."),
    "path-characters": (
        "The path {got} holds characters that cannot be quoted in a comment of C.",
        "Rename the file.",
    ),
    "path-climbs-out": (
        "The path {path} climbs out of the spec's folder.",
        "Put the file beside the spec, or below its folder.",
    ),
    "path-link-out": (
        "The path {path} leads by a link out of the spec's folder.",
        "Replace the link by a copy of the file.",
    ),
    "path-loops": (
        "The path {path} cannot be followed: links in a circle, or too long a name.",
        "Replace the links by the file.",
    ),
    "target-name": (
        "{path} is no plain file name.",
        "Name files without folders; the folder is given apart.",
    ),
    "target-is-folder": (
        "{path} is to be written, and a folder of that name is there.",
        "Remove or rename that folder, or choose another one for the output.",
    ),
    "folder-is-file": (
        "{path} should be a folder, and there is a file on the way to it.",
        "Choose another folder, or move that file.",
    ),
    "folder-unwritable": (
        "Nobody lets this account write into {path}.",
        "Change its permissions, or choose another folder.",
    ),
    "disk-full": (
        "There is no room left to write into {path}.",
        "Make room, or choose another disk; nothing was changed there.",
    ),
    "write-failed": (
        "Writing into {path} failed: {reason}.",
        "Look at the disk, or choose another folder.",
    ),
}

_ARRAYS: dict[str, tuple[str, str]] = {
    "format-unknown": (
        "{path} has the suffix {got}, which names no format that is read here.",
        "Use one of {expected}.",
    ),
    "image-damaged": (
        "{path} is damaged or of another format: {reason}.",
        "Save it again, and check that it was copied whole.",
    ),
    "image-truncated": (
        "{path} ends too early: it has {got} {unit} of data, and its header asks for {expected}.",
        "Copy it again; check that the transfer was complete.",
    ),
    "image-extra": (
        "{path} goes on after its image: {got} {unit} too many.",
        "Save one image alone in the file.",
    ),
    "image-empty": ("{path} has no pixels.", "Use an array of at least one row and column."),
    "image-too-large": (
        "{path} has {rows} x {columns} pixels; at most {limit} pixels are read.",
        "Crop it.",
    ),
    "image-channels": (
        "{path} has {got} channels; here only {expected} will do.",
        "Use one channel, or an .npy file, which holds any number.",
    ),
    "image-codes": (
        "The codes for {path} run from {low} to {high}; the format holds none over {limit} "
        "and none under its own least.",
        "Use an .npy file for other codes.",
    ),
    "pgm-magic": (
        "{path} begins with {got}, and a grey map with P2 or P5.",
        "Save it as a portable grey map (.pgm).",
    ),
    "pgm-header": ("{path} has no readable {missing} in its header.", "Save it again."),
    "pgm-maxval": (
        "{path} states {got} as its greatest value; it must be in 1..{limit}.",
        "Save it again with 8 or 16 bits.",
    ),
    "pgm-code": (
        "{path} holds the code {got}, over the {limit} that it states as its greatest.",
        "Correct the header's greatest value, or the codes.",
    ),
    "pgm-word": (
        "{path} holds {got} where a code should stand.",
        "Write whole numbers in 0..65535, apart by spaces.",
    ),
    "png-kind": (
        "{path} is {got}; its codes cannot be read unchanged.",
        "Convert it to one of: {expected}; or save the codes as .npy.",
    ),
    "npy-pickled": (
        "{path} holds Python objects, which are never loaded: they could run any code.",
        "Save an array of numbers with allow_pickle=False.",
    ),
    "npy-type": (
        "{path} holds elements of type {got}.",
        "Save {expected}: the types int8..int64, uint8..uint64 and, for taps, float16..float64.",
    ),
    "npy-shape": (
        "{path} has an array of {got} dimensions, and {expected} are needed.",
        "Reshape it: rows, columns and, for an image, channels.",
    ),
    "array-too-large": (
        "{path} has {rows} x {columns} taps; a box has at most {limit} rows and columns.",
        "Crop the kernel, or use image.spacing for one that is sparse.",
    ),
    "array-not-finite": (
        "{path} holds {got} in row {row}, column {column}.",
        "Replace it by a number.",
    ),
    "csv-empty": ("{path} has no rows.", "Write one row of numbers per line, apart by commas."),
    "csv-ragged": (
        "{path}, line {row}: {got} cells, where the first row has {expected}.",
        "Give every row as many cells; write zeros out.",
    ),
    "csv-cell": (
        "{path}, line {row}, cell {column}: {got} is no exact number ({why}).",
        'Write decimals such as 0.25 or ratios such as 1/16, apart by commas ("," only).',
    ),
}

_TOML: dict[str, tuple[str, str]] = {
    "toml-syntax": (
        "This is not TOML 1.0: {reason}.",
        "Correct this line; what follows it has not been read.",
    ),
    "toml-twice": (
        "This stands in the file for the second time; it was first given in line {first}.",
        "Keep one of them.",
    ),
    "toml-deep": (
        "Brackets or dotted keys are nested more than {limit} deep.",
        "No key of a spec needs more than 3.",
    ),
    "toml-long-word": (
        "A number or bare word has more than {limit} characters.",
        "Shorten it; no number of a spec needs so many digits.",
    ),
    "key-misspelt": ("There is no key {got} in this table.", "Perhaps {nearest} was meant."),
    "key-unknown": ("There is no key {got} in this table.", "Its keys are {expected}."),
    "table-misspelt": ("There is no table {got}.", "Perhaps {nearest} was meant."),
    "table-unknown": ("There is no table {got}.", "The tables are {expected}."),
    "explain-unknown": ("There is no key or table {got}.", "Perhaps {nearest} was meant."),
    "key-missing": ("The key {got} is required and was left out.", "Give it {expected}."),
    "not-in-this-version": (
        "[{got}] is not available in this version.",
        "Remove the table.",
    ),
}

_VALUES: dict[str, tuple[str, str]] = {
    "type-wrong": ("{got} has the wrong type.", "Write {expected}."),
    "out-of-limits": ("{got} is outside the limits.", "Write {expected}."),
    "word-misspelt": (
        "{got} is none of the words.",
        "Perhaps {nearest} was meant; legal are {expected}.",
    ),
    "word-unknown": ("{got} is none of the words.", "Write {expected}."),
    "span-empty": ("{got} ends before it begins.", "Write [least, greatest]."),
    "number-malformed": ("{got} is no number.", "Write {expected}."),
    "number-not-finite": ("{got} is not finite.", "Write {expected}."),
    "number-too-long": (
        "{got} has over 400 digits, or a power of ten beyond 400.",
        "Write {expected}.",
    ),
    "number-over-zero": ("{got} divides by zero.", "Write {expected}."),
    "tap-type-wrong": (
        "The tap at {where} is {got}.",
        'Write a number: whole, decimal, or a ratio such as "1/16".',
    ),
    "tap-malformed": (
        "The tap at {where} is {got}, which is no number.",
        'Write a whole number, a decimal, or a ratio such as "1/16".',
    ),
    "tap-not-finite": ("The tap at {where} is {got}.", "Write a finite number."),
    "tap-too-long": (
        "The tap at {where}, {got}, has over 400 digits or a power of ten beyond 400.",
        "Write it with fewer; no register is so wide.",
    ),
    "tap-over-zero": ("The tap at {where}, {got}, divides by zero.", "Correct the ratio."),
    "more-like-these": ("There are {got} more like these here.", ""),
    "name-malformed": (
        "The name {got} cannot prefix symbols of C: {why}.",
        "Use a letter, then up to 23 letters, digits or underscores.",
    ),
    "name-keyword": (
        "The name {got} is a keyword of C or C++.",
        "Choose another, or add a digit or a word to it.",
    ),
    "name-underscores": (
        "The name {got} would make symbols with two underscores in a row, which C++ reserves.",
        "Use single underscores, and none at the end.",
    ),
    "name-reserved": (
        "The name {got} ends in {ending}, as files do that other filters emit.",
        "Choose another name.",
    ),
    "summary-long": (
        "The summary has {got} characters; at most {limit} stand on one line.",
        "Shorten it.",
    ),
    "summary-comment": (
        "The summary holds {got}, which could end or open a comment in C.",
        "Leave it out.",
    ),
    "summary-unprintable": (
        "The summary holds {got}, which cannot be printed on one line.",
        "Write one line of plain text.",
    ),
}

_KERNELS: dict[str, tuple[str, str]] = {
    "kernel-missing": (
        "There is no kernel.",
        "Give kernel.taps, kernel.column and kernel.row, kernel.file, or kernel.formula.",
    ),
    "kernel-twice": ("The kernel is given by {got} at once.", "Keep one of them."),
    "kernel-half": (
        "There is a {got} but no {missing}.",
        "Give both kernel.column and kernel.row.",
    ),
    "kernel-empty": ("The kernel has no taps.", "Write at least one row with one tap."),
    "kernel-ragged": (
        "Row {row} has the length {got}; the first row has {expected}.",
        "Make all rows equally long; write zeros out.",
    ),
    "kernel-too-large": (
        "The kernel has {rows} x {columns} taps; a box has at most {limit} rows and columns.",
        "Crop it, or use image.spacing for one that is sparse.",
    ),
    "kernel-too-long": (
        "The vector has {got} taps; at most {limit} are legal.",
        "Crop it, or use image.spacing for one that is sparse.",
    ),
    "kernel-many-taps": (
        "{got} taps are not zero; at most {limit} may be.",
        "Crop the kernel, or run it in two passes with [intermediate].",
    ),
    "parameter-alone": (
        "{got} is a parameter of a formula, and there is none.",
        "Add kernel.formula, or remove the parameter.",
    ),
    "parameter-unused": (
        'The formula "{formula}" has no parameter {got}.',
        "Remove it; the formula takes {expected}.",
    ),
    "parameter-missing": (
        'The formula "{formula}" needs the parameter {got}.',
        "Add kernel.{got}; guardbit explain kernel.formula tells what it means.",
    ),
    "derivative-size": (
        "A derivative cannot have the size {got}.",
        "Use odd sizes, at least 3 along kernel.axis.",
    ),
    "pair-and-scalar": (
        "{pair} is a pair, one each for column and row, and {scalar} is not.",
        "Write {scalar} as a pair too, or leave it out.",
    ),
    "pair-without-vectors": (
        "{got} is a pair, one each for column and row, and the kernel is one matrix.",
        "Give the kernel as kernel.column and kernel.row, or write one number.",
    ),
    "intermediate-without-vectors": (
        "[intermediate] makes two passes, a column's and a row's, and the kernel is one matrix.",
        "Give the kernel as kernel.column and kernel.row, or remove [intermediate].",
    ),
    "intermediate-without-pairs": (
        "[intermediate] fits column and row each alone, and {got} is one value for both.",
        "Write it as [column's, row's], or leave it out.",
    ),
    "exact-with": (
        'With scale = "exact" the taps are the coefficients, and {got} does not apply.',
        "Remove it.",
    ),
    "exact-taps": (
        'scale = "exact" needs whole numbers as taps, and one of them is {got}.',
        "Multiply taps and divisor by a common denominator.",
    ),
    "exact-divisor": (
        'scale = "exact" needs a positive whole number as divisor; it is {got}.',
        "Multiply taps and divisor by a common denominator.",
    ),
    "sum-is-zero": (
        'divisor = "sum" divides by the sum of the taps, which is zero.',
        "Write a number.",
    ),
    "pinned-form": ("The pinned taps are not whole numbers in that form.", "Write {expected}."),
    "pinned-kind": (
        "The pinned taps must be {expected} here.",
        "Pin column and row where divisor and frac are pairs, a matrix where they are not.",
    ),
    "pinned-box": (
        "The pinned taps are {got}, and the kernel's box is {expected}.",
        "Pin one integer for every tap, zeros included.",
    ),
    "pinned-bits": (
        "The pinned tap {got} does not fit {bits} bits, {low}..{high}.",
        "Raise coefficient.bits, or pin taps that fit.",
    ),
}

_FORMATS: dict[str, tuple[str, str]] = {
    "not-a-code": (
        "{got} is not a code of this format ({format}).",
        "Write a whole number from {low} to {high}.",
    ),
    "range-outside-bits": (
        "{got} goes beyond the codes of this format ({format}).",
        "Keep it within [{low}, {high}].",
    ),
    "container-narrow": (
        '"{got}" does not hold the codes of this format ({format}): {low}..{high}.',
        "Use one of {expected}.",
    ),
    "wrap-with-range": (
        'overflow = "wrap" is modulo the whole format, so a range has no meaning.',
        'Remove the range, or use overflow = "saturate".',
    ),
    "preload-rounding": (
        'preload = "rounding" adds half and floors, which is ties-to-positive; {other} is "{got}".',
        'Set {other} to "ties-to-positive", or preload to "zero".',
    ),
    "preload-exact": (
        'preload = "rounding" needs a shift after the sum, and scale = "exact" divides.',
        'Set preload to "zero".',
    ),
    "phase-too-large": (
        "The {axis} phase {got} is not below the step {step}.",
        "Write a phase from 0 to step - 1.",
    ),
    "site-without-pixels": (
        "An image of {got} has no pixel on some sites of a spacing of {spacing}, so the border of "
        "the full extent has nothing to continue.",
        "Write {remedy}.",
    ),
}

WORDS: dict[str, tuple[str, str]] = {
    **_FILES,
    **_ARRAYS,
    **_TOML,
    **_VALUES,
    **_KERNELS,
    **_FORMATS,
}
