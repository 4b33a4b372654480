"""Bad inputs: files that are missing, unreadable or badly put together."""

from tests.estimate.bad_inputs import FOLDER, bad
from tests.estimate.good_folder import (
    a_file_instead_of_the_folder,
    a_folder_instead,
    a_link_out,
    a_link_to_nothing,
    a_pipe_instead,
    content,
    every_base_nought,
    gone,
    in_turn,
    no_file,
    of_size,
    package,
    renamed,
    swap,
    swap_bytes,
    with_mark,
    without_column,
)

FILES = (
    bad(
        "no_such_folder",
        gone(),
        (FOLDER, "folder-not-found", "There is no such folder."),
    ),
    bad(
        "folder_is_a_file",
        a_file_instead_of_the_folder(),
        (FOLDER, "folder-not-found", "This is a file, not a folder."),
    ),
    bad(
        "no_settings",
        no_file("estimate.toml"),
        (
            "estimate.toml",
            "file-missing",
            (
                "There is no estimate.toml in the folder; it holds causes.csv, "
                "events.csv, hours.csv, packages.csv, prices.csv and systemic.csv."
            ),
        ),
    ),
    bad(
        "no_packages",
        no_file("packages.csv"),
        (
            "packages.csv",
            "file-missing",
            (
                "There is no packages.csv in the folder; it holds causes.csv, "
                "estimate.toml, events.csv, hours.csv, prices.csv and systemic.csv."
            ),
        ),
    ),
    bad(
        "packages_misnamed",
        renamed("packages.csv", "package.csv"),
        (
            "packages.csv",
            "file-missing",
            (
                "There is no packages.csv in the folder; it holds causes.csv, "
                "estimate.toml, events.csv, hours.csv, package.csv, "
                "prices.csv and systemic.csv."
            ),
        ),
        (
            "package.csv",
            "file-misnamed",
            "A file of this name is not read; packages.csv is.",
        ),
    ),
    bad(
        "events_with_a_capital",
        renamed("events.csv", "Events.csv"),
        (
            "Events.csv",
            "file-misnamed",
            "A file of this name is not read; events.csv is.",
        ),
    ),
    bad(
        "events_with_a_second_ending",
        renamed("events.csv", "events.csv.txt"),
        (
            "events.csv.txt",
            "file-misnamed",
            "A file of this name is not read; events.csv is.",
        ),
    ),
    bad(
        "a_folder_called_packages",
        a_folder_instead("packages.csv"),
        ("packages.csv", "not-a-file", '"packages.csv" is a folder.'),
    ),
    bad(
        "a_folder_called_settings",
        a_folder_instead("estimate.toml"),
        ("estimate.toml", "not-a-file", '"estimate.toml" is a folder.'),
    ),
    bad(
        "a_pipe_called_causes",
        a_pipe_instead("causes.csv"),
        ("causes.csv", "not-a-file", '"causes.csv" is a device or a pipe.'),
    ),
    bad(
        "a_link_out_of_the_folder",
        a_link_out("causes.csv"),
        (
            "causes.csv",
            "not-a-file",
            '"causes.csv" is a link that leads out of the folder.',
        ),
    ),
    bad(
        "a_link_to_nothing",
        a_link_to_nothing("systemic.csv"),
        (
            "systemic.csv",
            "file-unreadable",
            'The file "systemic.csv" cannot be read (no such file or directory).',
        ),
    ),
    bad(
        "packages_of_50_mb",
        of_size("packages.csv", 50),
        (
            "packages.csv",
            "file-too-large",
            '"packages.csv" has 50.0 MB; at most 8 are read.',
        ),
    ),
    bad(
        "empty_packages",
        content("packages.csv", b""),
        ("packages.csv", "file-empty", "The file is empty."),
    ),
    bad(
        "empty_settings",
        content("estimate.toml", b"\xef\xbb\xbf \n"),
        ("estimate.toml", "file-empty", "The file is empty."),
    ),
    bad(
        "comments_only",
        content("systemic.csv", "# nothing yet\n#\n"),
        ("systemic.csv", "file-empty", "The file holds comments only."),
    ),
    bad(
        "windows_encoding",
        swap_bytes("packages.csv", b"Dome shell", b"Dome sh\xe9ll"),
        ("packages.csv:3", "not-utf-8", "The byte 0xe9 is no UTF-8 text."),
    ),
    bad(
        "windows_encoding_after_a_mark",
        in_turn(
            swap_bytes("packages.csv", b"Dome shell", b"Dome sh\xe9ll"),
            with_mark("packages.csv"),
        ),
        ("packages.csv:3", "not-utf-8", "The byte 0xe9 is no UTF-8 text."),
    ),
    bad(
        "settings_in_another_encoding",
        swap_bytes("estimate.toml", b"A single dome", b"A s\xecngle dome"),
        ("estimate.toml:19", "not-utf-8", "The byte 0xec is no UTF-8 text."),
    ),
    bad(
        "utf_16",
        content("packages.csv", "id,name,base\nP1,A,5\n".encode("utf-16")),
        ("packages.csv:1", "not-utf-8", "The file is UTF-16 text."),
    ),
    bad(
        "utf_16_without_mark",
        content("packages.csv", "id,name,base\nP1,A,5\n".encode("utf-16-le")),
        (
            "packages.csv:1",
            "not-utf-8",
            "A byte of value nought (NUL) stands in the text.",
        ),
    ),
    bad(
        "nought_byte",
        swap_bytes("events.csv", b"Bats", b"Ba\x00ts"),
        (
            "events.csv:7",
            "not-utf-8",
            "A byte of value nought (NUL) stands in the text.",
        ),
    ),
    bad(
        "control_character",
        package("P400", name="Per\x07mit"),
        (
            "packages.csv:7, package P400 Per\\u0007mit, name",
            "control-character",
            "The character U+0007 stands in the cell.",
        ),
    ),
    bad(
        "tabs",
        content("packages.csv", "id\tname\tbase\nP1\tA\t5\n"),
        (
            "packages.csv:1",
            "separator-unknown",
            'The header row is one cell, "id name base".',
        ),
    ),
    bad(
        "other_separator",
        content("causes.csv", "id|name\nsteel|Steel\n"),
        ("causes.csv:1", "separator-unknown", 'The header row is one cell, "id|name".'),
    ),
    bad(
        "hash_without_space",
        swap("packages.csv", "P400,", "#P400,"),
        (
            "packages.csv:7",
            "comment-unclear",
            'The line begins "#P400,Permit,,10000,".',
        ),
    ),
    bad(
        "open_quote",
        swap("packages.csv", "Permit", '"Permit'),
        (
            "packages.csv:7",
            "table-syntax",
            "A quote is opened in this row and not closed to the end of the file.",
        ),
    ),
    bad(
        "text_after_a_quote",
        swap("packages.csv", "Permit", '"Per"mit'),
        ("packages.csv:7", "table-syntax", "The quotes of this row do not match"),
    ),
    bad(
        "endless_cell",
        swap("packages.csv", "Permit", "P" * 140_000),
        (
            "packages.csv:7",
            "table-syntax",
            "A cell goes on for more than a hundred thousand characters.",
        ),
    ),
    bad(
        "unknown_column",
        swap("packages.csv", "group", "grup"),
        (
            "packages.csv:1, column grup",
            "column-unknown",
            'The table has no column "grup".',
        ),
    ),
    bad(
        "unknown_column_far_from_any",
        swap("packages.csv", "spend", "colour"),
        (
            "packages.csv:1, column colour",
            "column-unknown",
            'The table has no column "colour".',
        ),
    ),
    bad(
        "missing_column",
        without_column("packages.csv", "base"),
        (
            "packages.csv:1, column base",
            "column-missing",
            "The header row has no column base.",
        ),
    ),
    bad(
        "missing_kind",
        without_column("events.csv", "kind"),
        (
            "events.csv:1, column kind",
            "column-missing",
            "The header row has no column kind.",
        ),
    ),
    bad(
        "column_twice",
        swap("packages.csv", "prices,", "group,"),
        (
            "packages.csv:1, column group",
            "column-twice",
            "The column group stands 2 times in the header row.",
        ),
    ),
    bad(
        "blank_heading",
        swap("packages.csv", "prices", ""),
        (
            "packages.csv:2, package P100 Design",
            "column-unnamed",
            '"wages" stands under a blank name, in column 13.',
        ),
    ),
    bad(
        "row_too_long",
        swap("packages.csv", "Permit,,10000", "Permit,,10,000"),
        (
            "packages.csv:7, package P400 Permit",
            "row-ragged",
            "The row has 25 cells; the header row has 24.",
        ),
    ),
    bad(
        "row_too_short",
        swap("packages.csv", "Permit,,10000,", "Permit,10000,"),
        (
            "packages.csv:7, package P400 Permit",
            "row-ragged",
            "The row has 23 cells; the header row has 24.",
        ),
    ),
    bad(
        "no_rows",
        content("packages.csv", "id,name,base,shape\n"),
        ("packages.csv", "no-packages", "The table has no rows below its header row."),
    ),
    bad(
        "nothing_to_insure",
        every_base_nought(),
        ("packages.csv", "no-base", "The bases of all packages sum to 0."),
    ),
)
