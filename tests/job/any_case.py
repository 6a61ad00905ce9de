"""Cases that hold anything: usable ones over their whole range, and ones with entries that nobody can use."""

from hypothesis import strategies as st

from engine.job.case import BLANK, as_entered
from engine.job.case.demo import DEMO
from engine.job.case.examples import EXAMPLES
from engine.job.case.fields import FIELDS
from engine.job.case.rows import CHOICE, QUANTITY, TABLE, TEXT, Entry
from engine.steam.units import UNITS
from tests.contract import NONSENSE, WILD

INSIDE = st.floats(0.001, 0.999)


def entries(field, share=INSIDE):
    """Usable entries of a quantity: anywhere between its limits, in any unit."""
    def entered(share, unit, basis):
        return as_entered(field, field.low + share * (field.high - field.low), Entry(0.0, unit, basis), 101_325.0)

    bases = st.sampled_from(("gauge", "absolute")) if field.kind == "pressure" else st.just("")
    entry = st.builds(entered, share, st.sampled_from(list(UNITS[field.kind])), bases)
    return entry if field.blank is not None else st.none() | entry


PRINTED = st.text(st.characters(exclude_categories=["Cs"]), max_size=40)
VALUES = {QUANTITY: entries, CHOICE: lambda field: st.sampled_from(field.options), TEXT: lambda field: PRINTED,
          TABLE: lambda field: st.lists(st.builds(field.row, **{
              column.name: VALUES[column.form](column) for column in field.columns}), max_size=3).map(tuple)}
CASES = st.fixed_dictionaries({}, optional={name: VALUES[field.form](field) for name, field in FIELDS.items()})


def odd(field):
    """What may stand in an entry though it cannot be used."""
    units = st.sampled_from(list(UNITS.get(field.kind, ("bar",))))
    wild = st.builds(Entry, WILD, units, st.sampled_from(("gauge", "absolute", "")))
    strange = st.builds(Entry, NONSENSE, units | NONSENSE, st.just("") | NONSENSE)
    tables = st.lists(st.just(field.row()) | NONSENSE, max_size=2).map(tuple) if field.form == TABLE else NONSENSE
    return wild | strange | NONSENSE | tables


@st.composite
def cases(draw):
    """A known case with a few entries changed: at most one of them to something that cannot be used."""
    base = draw(st.sampled_from([DEMO, BLANK, *EXAMPLES.values()]))
    names = draw(st.lists(st.sampled_from(list(FIELDS)), max_size=5, unique=True))
    changed = {name: draw(VALUES[FIELDS[name].form](FIELDS[name])) for name in names}
    if draw(st.sampled_from((False, False, True))):
        name = draw(st.sampled_from(list(FIELDS)))
        changed[name] = draw(odd(FIELDS[name]))
    if draw(st.sampled_from((False, False, False, True))):  # the very ends
        name = draw(st.sampled_from([name for name, field in FIELDS.items() if field.form == QUANTITY]))
        changed[name] = draw(entries(FIELDS[name], st.sampled_from((0.0, 1.0)))) or FIELDS[name].blank
    return base.with_(**changed)
