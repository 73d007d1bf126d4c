"""Pronunciations for training: British forms first, CMUdict (BSD, in the pocketsphinx package) for the rest.

Promises: every word of VOCABULARY has at least one pronunciation in CMUdict's phones without stress.
Leaves out: what the tool itself listens for; that stands in its own pronunciation file, read by Rust.
"""

import functools
import re

import places

DIGITS = "zero one two three four five six seven eight nine".split()
NONZERO = DIGITS[1:]
TEENS = ("ten eleven twelve thirteen fourteen fifteen sixteen seventeen eighteen nineteen").split()
TENS = "twenty thirty forty fifty sixty seventy eighty ninety".split()
NATO = ("alpha bravo charlie delta echo foxtrot golf hotel india juliet kilo lima mike november oscar papa "
        "quebec romeo sierra tango uniform victor whiskey x-ray yankee zulu").split()
UNITS = ("ohm ohms milliohm milliohms megohm megohms kilohm meg megs meg milli kay volt volts amp amps milliamp "
         "milliamps kiloamps milliseconds seconds hertz percent").split()
PLACES = ("circuit ring radial socket spur leg line neutral earth cpc board way end page point light switch joint "
          "main link phase live bonding loop electrode").split()
COMMANDS = ("pass fail yes no confirm correct wrong scrap undo repeat next back skip stop pause resume note on off "
            "removed nulled limit polarity insulation continuity open affirm affirmative negative say again "
            "correction disregard standby keep found as reason ditto list help hold ready done fitted clear tick "
            "up down closed carry go ahead close full infinity furthest far left right start enter erase first "
            "second third").split()
GLUE = ("hundred thousand oh nought point decimal niner double triple more greater than over less range per cent "
        "and a to in out line-one ell en").split()
VOCABULARY = list(dict.fromkeys(DIGITS + TEENS + TENS + NATO + UNITS + PLACES + COMMANDS + GLUE))
VOCABULARY = [w for w in VOCABULARY if w != "line-one"]

# British first; American kept as a variant, since both are heard and the alignment picks.
HAND = {
    "nought": ["N AO T"], "zero": ["Z IH R OW", "Z IY R OW", "Z IH AH R OW"], "oh": ["OW"],
    "nine": ["N AY N"], "niner": ["N AY N AH", "N AY N ER"], "decimal": ["D EH S IH M AH L", "D EH S AH M AH L"],
    "ohm": ["OW M"], "ohms": ["OW M Z"], "kay": ["K EY"], "milli": ["M IH L IY"], "ell": ["EH L"], "en": ["EH N"],
    "meg": ["M EH G"], "megs": ["M EH G Z"], "kiloamps": ["K IH L OW AE M P S"],
    "milliohm": ["M IH L IY OW M"], "milliohms": ["M IH L IY OW M Z"],
    "megohm": ["M EH G OW M"], "megohms": ["M EH G OW M Z"], "kilohm": ["K IH L OW M"],
    "amps": ["AE M P S"], "milliamp": ["M IH L IY AE M P"], "milliamps": ["M IH L IY AE M P S"],
    "milliseconds": ["M IH L IY S EH K AH N D Z", "M IH L AH S EH K AH N D Z"],
    "volt": ["V OW L T"], "volts": ["V OW L T S"], "hertz": ["HH ER T S"],
    "cpc": ["S IY P IY S IY"], "nulled": ["N AH L D"],
    "four": ["F AO R", "F AO"], "forty": ["F AO R T IY", "F AO T IY"],
    "fourteen": ["F AO R T IY N", "F AO T IY N"], "board": ["B AO R D", "B AO D"],
    "over": ["OW V ER", "OW V AH"], "greater": ["G R EY T ER", "G R EY T AH"],
    "more": ["M AO R", "M AO"], "per": ["P ER"], "percent": ["P ER S EH N T", "P AH S EH N T"],
    "november": ["N OW V EH M B ER", "N OW V EH M B AH"], "oscar": ["AO S K ER", "AO S K AH", "AA S K ER"],
    "victor": ["V IH K T ER", "V IH K T AH"], "charlie": ["CH AA R L IY", "CH AA L IY", "SH AA L IY"],
    "uniform": ["Y UW N AH F AO R M", "Y UW N IH F AO M"], "papa": ["P AA P AH", "P AH P AA"],
    "lima": ["L IY M AH"], "quebec": ["K W AH B EH K", "K AH B EH K", "K W IH B EH K", "K EY B EH K"],
    "bravo": ["B R AA V OW"], "stop": ["S T AA P", "S T AO P"], "off": ["AO F"], "on": ["AA N", "AO N"],
    "golf": ["G AA L F", "G AO L F"], "foxtrot": ["F AA K S T R AA T", "F AO K S T R AO T"],
    "hotel": ["HH OW T EH L"], "whiskey": ["W IH S K IY"], "juliet": ["JH UW L IY EH T"],
    "delta": ["D EH L T AH"], "x-ray": ["EH K S R EY"], "sierra": ["S IY EH R AH"],
    "socket": ["S AA K AH T", "S AO K IH T"], "bonding": ["B AA N D IH NG", "B AO N D IH NG"],
    "continuity": ["K AA N T AH N UW AH T IY", "K AO N T IH N Y UW IH T IY"],
    "polarity": ["P OW L EH R AH T IY", "P AH L AE R IH T IY", "P OW L AE R IH T IY"],
    "neutral": ["N UW T R AH L", "N Y UW T R AH L"],
    "circuit": ["S ER K AH T", "S ER K IH T"], "resume": ["R IH Z UW M", "R IY Z UW M", "R IH Z Y UW M"],
    "hundred": ["HH AH N D R AH D", "HH AH N D R IH D"], "pass": ["P AE S", "P AA S"],
    "than": ["DH AE N", "DH AH N"], "radial": ["R EY D IY AH L"], "wrong": ["R AO NG"], "no": ["N OW"],
    "correct": ["K ER EH K T", "K AH R EH K T"],
    "correction": ["K ER EH K SH AH N", "K AH R EH K SH AH N"],
    "insulation": ["IH N S AH L EY SH AH N", "IH N S Y UH L EY SH AH N"],
    "affirm": ["AH F ER M"], "affirmative": ["AH F ER M AH T IH V"], "standby": ["S T AE N D B AY"],
    "disregard": ["D IH S R IH G AA R D", "D IH S R IH G AA D"], "again": ["AH G EH N", "AH G EY N"],
    "and": ["AE N D", "AH N D", "AH N"], "a": ["AH", "EY"], "to": ["T UW", "T AH"],
    "earth": ["ER TH"], "live": ["L AY V"], "main": ["M EY N"], "furthest": ["F ER DH AH S T", "F ER DH IH S T"],
    "far": ["F AA R", "F AA"], "clear": ["K L IH R", "K L IY R", "K L IH AH"], "infinity": ["IH N F IH N AH T IY", "IH N F IH N IH T IY"],
    "electrode": ["IH L EH K T R OW D"], "start": ["S T AA R T", "S T AA T"], "third": ["TH ER D"],
    "point": ["P OY N T"], "half": ["HH AE F", "HH AA F"], "carry": ["K AE R IY", "K EH R IY"],
    "closed": ["K L OW Z D"], "close": ["K L OW Z", "K L OW S"], "open": ["OW P AH N"],
    "rubout": ["R AH B AW T"], "sheila": ["SH IY L AH"], "marvin": ["M AA R V IH N"],
}
ALIASES = {"alfa": "alpha", "juliett": "juliet", "whisky": "whiskey"}


@functools.cache
def cmudict():
    """Word -> pronunciations, as the package's dictionary has them."""
    out = {}
    for line in (places.english() / "cmudict-en-us.dict").read_text(encoding="latin1").splitlines():
        word, p = line.split(None, 1)
        out.setdefault(re.sub(r"\(\d+\)$", "", word), []).append(" ".join(p.split()))
    return out


def pronunciations(word: str):
    """All known forms of a word, or None."""
    w = word.lower()
    w = ALIASES.get(w, w)
    return HAND.get(w) or cmudict().get(w)


if __name__ == "__main__":
    missing = [w for w in VOCABULARY if not pronunciations(w)]
    print(len(VOCABULARY), "words, missing:", missing)
    raise SystemExit(bool(missing))
