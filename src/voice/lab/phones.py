"""The fixed inventory of sounds of the voice, and how they are numbered.

Promises: one table that every stage and the Rust graph builder agree on. Class (pdf) numbers are the
outputs of the network; phone ids and transition ids are what libvosk's transition model counts.
Leaves out: pronunciations of words (see lexicon.py).

One state a phone. Class 0 is SIL, 1..39 are the CMUdict phones, 40 is NSN (talk and noise that no
grammar covers). Phone ids: SIL 1, NSN 2, then every CMUdict phone in four positions of a word, all
positions sharing the class of their phone.
"""

CMU = ("AA AE AH AO AW AY B CH D DH EH ER EY F G HH IH IY JH K L M N NG OW OY P R S SH "
       "T TH UH UW V W Y Z ZH").split()
CLASSES = ["SIL"] + CMU + ["NSN"]
CLASS_ID = {p: i for i, p in enumerate(CLASSES)}
SIL, NSN = 0, CLASS_ID["NSN"]
POSITIONS = ["begin", "end", "internal", "singleton"]

# (name, position, class) by phone id - 1
PHONES = [("SIL", "nonword", SIL), ("NSN", "nonword", NSN)]
PHONES += [(p, pos, CLASS_ID[p]) for p in CMU for pos in POSITIONS]
PHONE_ID = {(name, pos): i + 1 for i, (name, pos, _) in enumerate(PHONES)}


def self_loop(phone_id: int) -> int:
    """Transition id of the loop in the only state of a phone."""
    return 2 * (phone_id - 1) + 1


def forward(phone_id: int) -> int:
    """Transition id of the step out of the only state of a phone."""
    return 2 * (phone_id - 1) + 2


def positions(n: int) -> list[str]:
    """Position names of the phones of a word of n phones."""
    if n == 1:
        return ["singleton"]
    return ["begin"] + ["internal"] * (n - 2) + ["end"]


def phones_txt() -> str:
    """The table as committed beside the model: NAME POSITION ID FIRST_TID STATES."""
    return "".join(f"{n} {p} {i + 1} {self_loop(i + 1)} 1\n" for i, (n, p, _) in enumerate(PHONES))
