"""Sentences about goals and the search for word lengths: (what is wrong, what would be right)."""

WORDS: dict[str, tuple[str, str]] = {
    "auto-without-goal": (
        '{got} = "auto" is found by a search, and the spec has no goal for one.',
        "Write a number, or add [goal] with the error that is allowed.",
    ),
    "goal-empty": (
        "The goal does not say what is to be reached.",
        "Write goal.error, goal.snr or goal.response.",
    ),
    "goal-without-error": (
        "Nothing in the goal limits what is rounded away between the passes, so that any "
        "intermediate would reach it.",
        "Add goal.error or goal.snr, or write intermediate.bits and intermediate.frac as numbers.",
    ),
    "goal-half": (
        "goal.{got} says nothing without goal.{missing}.",
        "Write both or neither.",
    ),
    "word-twice": ("{got} stands there twice.", "Write {expected}, each at most once."),
    "goal-frame-channels": (
        "{path} has {got} channels, and the filter works on {wanted}.",
        "Name an image with as many channels as image.channels.",
    ),
    "goal-frame-size": (
        "{path} is {width} pixels wide and {height} high, which no image of the filter is.",
        "Name an image that image.width and image.height allow.",
    ),
    "goal-frame-codes": (
        "{path} holds codes from {least} to {most}, and those of the input are {low} to {high}.",
        "Name an image whose codes are all in the input's range.",
    ),
    "goal-too-many": (
        "The open words have {count} combinations, and nothing narrows them down: at most {most} "
        "are weighed.",
        "Write some of the words as numbers.",
    ),
    "goal-too-long": (
        "After {most} combinations of the open words were analysed, none was known to be best.",
        "Write some of the words as numbers, or add goal.error, which settles most of them.",
    ),
    "goal-no-choice": (
        "The rest of the spec forbids each of the {choices} combinations of the open words.",
        "Look at written accumulator widths, at overflow, and at preload.",
    ),
    "goal-unreachable": (
        "No combination of the open words reaches the goal: the nearest that was found has "
        "{reached}, and the {what} wanted is {wanted}.",
        "Ask for less, or leave more words open.",
    ),
    "goal-not-met": (
        "The {what} is {reached}, and the goal is {wanted}.",
        'Leave words open and run "guardbit size --pin" again, or change the goal.',
    ),
    "word-open": (
        "{got} is left to the search for the goal, and its result is not in the spec.",
        'Run "guardbit size --pin" on the spec: it searches and writes the numbers into it.',
    ),
}
