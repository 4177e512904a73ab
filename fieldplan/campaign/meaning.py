"""What each key of the campaign file is, in one line: for errors, editors and the reference."""

MEANING: dict[str, str] = {}
