"""The kinds of fault that reading an estimate folder can find.

Each kind is one class with a slug that never changes once released and one rule,
its `law`.  What was found and what to do about it is said where it is found.
``docs/errors.md`` has one heading per slug; ``tests/test_errors.py`` keeps the two
in step.
"""

from __future__ import annotations

from contingency.errors import Fault

# ---------------------------------------------------------------------------
# Files


class FolderNotFound(Fault):
    """The folder that was named is not there, or is no folder."""

    slug = "folder-not-found"
    law = "An estimate is a folder of plain files."


class FileMissing(Fault):
    """A file that every estimate has is not in the folder."""

    slug = "file-missing"
    law = "An estimate folder holds at least estimate.toml and packages.csv."


class FileMisnamed(Fault):
    """A file whose name is nearly one that the tool looks for."""

    slug = "file-misnamed"
    law = "Files are found by their exact names, in small letters."


class NotAFile(Fault):
    """A folder, a link out of the estimate or a device where a file should be."""

    slug = "not-a-file"
    law = "A file of an estimate is an ordinary file inside its folder."


class FileUnreadable(Fault):
    """A file that the operating system does not let us read."""

    slug = "file-unreadable"
    law = "Every file of an estimate must be open for reading."


class FileTooLarge(Fault):
    """A file far larger than any estimate needs."""

    slug = "file-too-large"
    law = "Files that are read have at most 8 MB, evidence files at most 32 MB."


class FileEmpty(Fault):
    """A file without content."""

    slug = "file-empty"
    law = "A file that is there says something: a table has at least its header row."


class NotUtf8(Fault):
    """Bytes that are no UTF-8 text."""

    slug = "not-utf-8"
    law = "Every file that is read is UTF-8 text."


class ControlCharacter(Fault):
    """A character that cannot be printed."""

    slug = "control-character"
    law = "Cells and settings hold printable text only."


class TomlSyntax(Fault):
    """estimate.toml breaks the rules of its own notation."""

    slug = "toml-syntax"
    law = "estimate.toml is written in TOML 1.0."


class TableSyntax(Fault):
    """Quotes in a table that do not match."""

    slug = "table-syntax"
    law = (
        "A cell that starts with a quote ends with one, and a separator or the end of "
        "the line follows."
    )


class SeparatorUnknown(Fault):
    """A header row that neither commas nor semicolons separate."""

    slug = "separator-unknown"
    law = "Cells are separated by commas or by semicolons; the header row decides."


class CommentUnclear(Fault):
    """A line that may be a comment or a row."""

    slug = "comment-unclear"
    law = "A comment line starts with # and a space; any other line is a row."


class ColumnUnknown(Fault):
    """A column that the table does not have."""

    slug = "column-unknown"
    law = (
        "A table has only the columns that docs/inputs.md lists, written the same way."
    )


class ColumnMissing(Fault):
    """A column that the table cannot do without."""

    slug = "column-missing"
    law = "The columns that identify a row and give its base must be there."


class ColumnTwice(Fault):
    """Two columns of one name."""

    slug = "column-twice"
    law = "Each column stands in a table once."


class ColumnUnnamed(Fault):
    """Figures or words under a blank heading."""

    slug = "column-unnamed"
    law = "A column that holds anything has a name in the header row."


class RowRagged(Fault):
    """A row with more or fewer cells than the header."""

    slug = "row-ragged"
    law = "Every row has as many cells as the header row."


class NoPackages(Fault):
    """A packages.csv with a header only."""

    slug = "no-packages"
    law = "An estimate has at least one work package."


class NoBase(Fault):
    """Packages whose bases sum to nought."""

    slug = "no-base"
    law = "The base estimate is more than nought: contingency is measured against it."


# ---------------------------------------------------------------------------
# Settings


class KeyUnknown(Fault):
    """A key or a heading that estimate.toml does not have."""

    slug = "key-unknown"
    law = (
        "estimate.toml has only the keys that docs/inputs.md lists, each under its "
        "own heading."
    )


class KeyMissing(Fault):
    """A key that an estimate cannot do without."""

    slug = "key-missing"
    law = "The keys that docs/inputs.md marks as required must be there."


class KindWrong(Fault):
    """A setting of another kind than the one expected."""

    slug = "kind-wrong"
    law = (
        "In TOML texts stand in quotes, numbers and days do not, lists stand in "
        "square brackets."
    )


class SettingOutOfRange(Fault):
    """A setting outside its bounds."""

    slug = "setting-out-of-range"
    law = "Each setting has the bounds that docs/inputs.md gives for it."


class TrialsNotInBlocks(Fault):
    """A number of trials that is no multiple of 4,096."""

    slug = "trials-not-in-blocks"
    law = "Trials come in whole blocks of 4,096."


class TrialsOutOfOrder(Fault):
    """More trials at least than at most."""

    slug = "trials-out-of-order"
    law = "least <= most."


class CurrencyUnknown(Fault):
    """A currency that is on no list."""

    slug = "currency-unknown"
    law = "A currency is its ISO 4217 code, in capitals."


class LevelUnknown(Fault):
    """A level that is no percentile."""

    slug = "level-unknown"
    law = "A level is written P and a whole number from 1 to 99."


class LevelTwice(Fault):
    """One level in two lines."""

    slug = "level-twice"
    law = "Each funding level stands in the list once."


class SignOffIncomplete(Fault):
    """A sign-off block without one of its three lines."""

    slug = "sign-off-incomplete"
    law = (
        "A sign-off block has the roles prepared, checked and approved, and each role "
        "once."
    )


class EndsUnclear(Fault):
    """A meaning of low and high that cannot be read."""

    slug = "ends-unclear"
    law = "The ends of a range are limits, or two rising percentiles such as P10-P90."


# ---------------------------------------------------------------------------
# Cells


class CellBlank(Fault):
    """A cell or a setting that must be filled and is not."""

    slug = "cell-blank"
    law = "What docs/inputs.md marks as required is not left blank."


class NotANumber(Fault):
    """Text where a figure should be."""

    slug = "not-a-number"
    law = (
        "A figure is digits with an optional decimal point: 1250000, 1_250_000 and "
        "1,250,000 are read."
    )


class DecimalComma(Fault):
    """A figure with a decimal comma."""

    slug = "decimal-comma"
    law = "The decimal sign is a point; a comma only groups thousands of money."


class DotThousands(Fault):
    """A figure with dots between thousands."""

    slug = "dot-thousands"
    law = "A dot is the decimal sign and stands in a figure once."


class AmountUnclear(Fault):
    """An amount that can be read in two ways."""

    slug = "amount-unclear"
    law = (
        "In a table with semicolons, 1.250 and 1,250 may be a thousand and more or "
        "one and a quarter."
    )


class FormulaInCell(Fault):
    """A spreadsheet formula, or what a broken one leaves."""

    slug = "formula-in-cell"
    law = "Cells hold values; nothing is computed while reading."


class NotFinite(Fault):
    """A figure that is infinite or no number at all."""

    slug = "not-finite"
    law = "Every figure is a finite number."


class NumberTooLarge(Fault):
    """A figure beyond any amount of money."""

    slug = "number-too-large"
    law = "Figures lie below 1,000,000,000,000,000,000 (1e18)."


class SignUnclear(Fault):
    """A plus sign before an amount or a share."""

    slug = "sign-unclear"
    law = (
        "Amounts are whole costs, not changes: 120% is a fifth above the base, +20% "
        "would be a fifth of it."
    )


class PercentMissing(Fault):
    """A systemic risk's figure without a percent sign."""

    slug = "percent-missing"
    law = (
        "A systemic risk is an uplift in percent of the cost that it acts on, written "
        "with %."
    )


class PercentUnwanted(Fault):
    """A percent sign where a plain number belongs."""

    slug = "percent-unwanted"
    law = "This figure is a plain number; a percent has nothing to refer to."


class NotADate(Fault):
    """A date in another form, or one that no calendar has."""

    slug = "not-a-date"
    law = "A date is written year-month-day, as in 2026-03-31."


class WordUnknown(Fault):
    """A word that the column does not know."""

    slug = "word-unknown"
    law = "A column of fixed words takes one of them, in small letters."


class IdUnusable(Fault):
    """An id that lists of ids could not hold."""

    slug = "id-unusable"
    law = "An id is one line without semicolons and colons."


class IdReserved(Fault):
    """An id or a group that means something else to the tool."""

    slug = "id-reserved"
    law = "The words all and project-wide are taken."


class IdTwice(Fault):
    """One id on two rows."""

    slug = "id-twice"
    law = "Ids are permanent and each stands for one thing."


class ListUnclear(Fault):
    """A cell of several entries that cannot be taken apart."""

    slug = "list-unclear"
    law = (
        "Entries of a cell are separated by semicolons and are written as "
        "docs/inputs.md shows."
    )


# ---------------------------------------------------------------------------
# Ranges


class RangeIncomplete(Fault):
    """A range without one of its figures."""

    slug = "range-incomplete"
    law = "Each shape needs its own figures: docs/inputs.md has the table."


class RangeOutOfOrder(Fault):
    """A range whose figures fall instead of rising."""

    slug = "range-out-of-order"
    law = "A range must not fall: low <= likely <= high."


class CellWithoutMeaning(Fault):
    """A filled cell that nothing would read."""

    slug = "cell-without-meaning"
    law = "A row holds only figures that are used; nothing is dropped in silence."


class EndsNotPercentiles(Fault):
    """A normal or lognormal range between limits."""

    slug = "ends-not-percentiles"
    law = "A normal or lognormal range has no limits: its low and high are percentiles."


class ShapeImpossible(Fault):
    """A range that no curve of its shape can have."""

    slug = "shape-impossible"
    law = "The figures of a range must define one curve of the shape named."


class ChancesNotWhole(Fault):
    """Outcomes whose probabilities do not sum to 1."""

    slug = "chances-not-whole"
    law = "One of the outcomes listed must happen: their probabilities sum to 1."


class PointsOutOfOrder(Fault):
    """Points of a curve that do not rise."""

    slug = "points-out-of-order"
    law = "The points of a curve, two at least, rise in percentile and in value."


class AmountNegative(Fault):
    """A negative amount."""

    slug = "amount-negative"
    law = "Costs are written as positive amounts; an opportunity's too."


class BelowSpent(Fault):
    """A final cost below what is already spent."""

    slug = "below-spent"
    law = "Only base - spent can still vary: no figure of the range lies below spent."


class PercentOfNothing(Fault):
    """A percent range of a package that has spent more than its base."""

    slug = "percent-of-nothing"
    law = "A percent range applies to base - spent, which must be positive."


class UpliftTooLow(Fault):
    """An uplift that takes more than the whole cost away."""

    slug = "uplift-too-low"
    law = "An uplift is at least -100%."


class RateOutOfRange(Fault):
    """A yearly price rate that leaves no price, or multiplies it beyond reason."""

    slug = "rate-out-of-range"
    law = "A price rate stays above -100 % and at most 1,000 % a year in every draw."


class ProbabilityOutOfRange(Fault):
    """A probability below 0 or above 1."""

    slug = "probability-out-of-range"
    law = "A probability lies between 0 and 1, or between 0% and 100%."


class FrequencyTooLarge(Fault):
    """An event that is expected to come thousands of times."""

    slug = "frequency-too-large"
    law = "A frequency is at most 1,000: what comes more often is cost, not risk."


class ShareOutOfRange(Fault):
    """A share below 0 or above 100 %."""

    slug = "share-out-of-range"
    law = "A share lies between 0% and 100%."


# ---------------------------------------------------------------------------
# Links between rows


class IdUnknown(Fault):
    """A name of something that is not in the estimate."""

    slug = "id-unknown"
    law = "A row may only name ids, groups and causes that the files define."


class SelfReference(Fault):
    """A row that names itself."""

    slug = "self-reference"
    law = "A row is tied to other rows, never to itself."


class LoadOutOfRange(Fault):
    """A load or correlation beyond 1."""

    slug = "load-out-of-range"
    law = "Loads and correlations lie between -1 and 1."


class LoadsTooStrong(Fault):
    """Loads that leave a package no spread of its own."""

    slug = "loads-too-strong"
    law = (
        "The squares of a package's loads and the general dependence sum to at most 1."
    )


class LoadsAndCorrelations(Fault):
    """Dependence described in two ways at once."""

    slug = "loads-and-correlations"
    law = "Dependence is given by loads on causes or by correlations.csv, not by both."


class PairTwice(Fault):
    """Two correlations of one pair."""

    slug = "pair-twice"
    law = "Each pair of packages has one correlation, whichever comes first."


class SharesNotWhole(Fault):
    """Shares of an event's cost that do not make the whole."""

    slug = "shares-not-whole"
    law = "The shares of an event's cost sum to 100 %."


class AppliesToUnclear(Fault):
    """A word under applies_to that means two things."""

    slug = "applies-to-unclear"
    law = (
        "applies_to is all, or a list of groups and package ids, each meaning one "
        "thing."
    )


class DatesReversed(Fault):
    """A finish before its start."""

    slug = "dates-reversed"
    law = "A window finishes on or after the day it starts."


class WindowTooFar(Fault):
    """A window in another century than any project."""

    slug = "window-too-far"
    law = "A window lies between the years 1900 and 2200, both included."


class HappensMismatch(Fault):
    """A frequency where a probability belongs, or the reverse."""

    slug = "happens-mismatch"
    law = (
        "An event that happens once has a probability, one that happens repeatedly a "
        "frequency."
    )


class AfterIncomplete(Fault):
    """Figures after treatment with gaps."""

    slug = "after-incomplete"
    law = "The state after treatment is given whole: chance and impact, or not at all."


class AfterMissing(Fault):
    """An event that uses figures after treatment and has none."""

    slug = "after-missing"
    law = "use = after needs the figures after treatment."


class RequiresCircle(Fault):
    """Events that wait for one another in a circle."""

    slug = "requires-circle"
    law = "requires leads back to an event that requires nothing."


class RequiresClosed(Fault):
    """An open event whose condition can no longer come true."""

    slug = "requires-closed"
    law = "An open event requires one that is open or has occurred."


class RequiresExcluded(Fault):
    """An event that requires what it excludes."""

    slug = "requires-excluded"
    law = "An event cannot require one that cannot happen together with it."


class ExcludesIncomplete(Fault):
    """Exclusive events of which two do not exclude each other."""

    slug = "excludes-incomplete"
    law = "Events joined by excludes form one group in which each excludes every other."


class ExcludesRepeated(Fault):
    """A repeated event among exclusive ones."""

    slug = "excludes-repeated"
    law = "Only events that happen once can exclude each other."


class ExcludesTooLikely(Fault):
    """Exclusive events that are together more than certain."""

    slug = "excludes-too-likely"
    law = "The probabilities of events that exclude each other sum to at most 1."


class ExcludesOccurred(Fault):
    """An open event beside an exclusive one that has occurred."""

    slug = "excludes-occurred"
    law = "Once an event has occurred, those that it excludes cannot happen."


class RetainedShareMismatch(Fault):
    """A retained share without a shared contract, or the reverse."""

    slug = "retained-share-mismatch"
    law = "retained_share belongs to contract = shared, and to it only."


class EvidenceName(Fault):
    """A file name under basis that leads out of the folder."""

    slug = "evidence-name"
    law = "file:NAME is the name of a file in the estimate folder, without a path."


class EvidenceMissing(Fault):
    """Evidence that is named and not there."""

    slug = "evidence-missing"
    law = (
        "A file that a basis cell names lies in the estimate folder and travels in "
        "the report."
    )


# ---------------------------------------------------------------------------
# The outside view and rated models


class ModelMissing(Fault):
    """A systemic risk that takes its uplift from something that is not there."""

    slug = "model-missing"
    law = (
        "model = history needs eight closed projects of history.csv that are declared "
        "comparable; model = ratings needs ratings.toml."
    )


class RatingUnclear(Fault):
    """A form or a rating that a rated model does not have."""

    slug = "rating-unclear"
    law = (
        "A model has the form log or linear; each factor has a value, or a rating "
        "that is one of its levels."
    )


# ---------------------------------------------------------------------------
# Changes since the previous revision


class SuccessionUnclear(Fault):
    """Ids before and after that describe no renaming, split or merger."""

    slug = "succession-unclear"
    law = (
        "before and into name what became of a row: one and one for a new id, one and "
        "several for a split, several and one for a merger; an id that stays names "
        "the same thing."
    )


class RestTwice(Fault):
    """Two lines that both explain all that is left of one base change."""

    slug = "rest-twice"
    law = (
        "Of the lines about one package one may leave the amount blank: it explains "
        "what the others leave."
    )


# ---------------------------------------------------------------------------
# Laying out a new folder


class FolderInUse(Fault):
    """A new estimate where something already is."""

    slug = "folder-in-use"
    law = "A new estimate needs a folder that is not there yet, or an empty one."


class FolderNotMade(Fault):
    """A folder that the operating system does not let us make."""

    slug = "folder-not-made"
    law = "The folder above must be there and open for writing."
