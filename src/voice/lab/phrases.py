"""Texts to be spoken: readings, digit strings, places, commands, and other English for coverage.

Promises: seeded, endless, every word pronounceable. What testers are likely to say is frequent, and what the
first model confused (teens and tens, repeated digits, "oh") is over-represented on purpose.
Leaves out: probabilities for decoding; those belong to the grammars.
"""

import gzip
import json
import random

import places
from lexicon import COMMANDS, DIGITS, NATO, NONZERO, TEENS, TENS, VOCABULARY, cmudict, pronunciations

SPOKEN_UNITS = ["ohms"] * 5 + ["megohms"] * 5 + ["milliohms", "milliamps", "volts", "amps", "ohm", "megohm", "meg",
                "megs", "kilohm", "milliseconds", "kiloamps", "seconds", "milli", "percent", "per cent", "hertz",
                "", "", ""]
FIXED = ("open circuit;correction;say again;affirm;affirmative;negative;disregard;standby;over range;line to earth;"
         "neutral to earth;line to neutral;insulation resistance;end to end;link on;link off;link removed;link fitted;"
         "polarity pass;confirm;undo;carry on;go ahead;keep as found;hands clear;leads nulled;line one;line two;"
         "line three;phase one;live to earth;main switch;light switch;furthest point;open points;all done;"
         "insulation pass;skip this;skip circuit;next circuit;hold on;not ready;clear;tick;full scale;infinity;ditto;"
         "first end;second end;third point;ring end;spur point;socket open;switch closed;read it back;"
         "help;list;reason;done;ready;stop;repeat;r one plus r two;close up;switch on;switch off").split(";")
TALK = ("can you pass me the other ladder;what time is the van coming back;mind your head on that pipe;"
        "i think the kettle has boiled again;who left the radio on in here;the plaster is still wet over there;"
        "my brother bought a new dog last summer;we should order pizza for lunch;he said the weather looks awful;"
        "put the box near the window please;there is dust all over these shelves;she works behind the church;"
        "have you seen my gloves anywhere;the boss wants a quick chat later;that drill makes a horrible noise;"
        "bring some longer screws tomorrow morning;how much did they charge you for it;watch the football tonight;"
        "nobody told me about the meeting;give him a call and ask about the keys;it smells like burnt toast;"
        "the garage door is jammed;turn the music down a bit;those boots look comfortable;"
        "we parked behind the yellow truck;just leave it until monday").split(";")


def _tens(r):
    return r.choice(TENS) + r.choice(["", " " + r.choice(NONZERO)])


def digits(r, n):
    """n digits as said one by one, often repeating, zero also as oh and nought."""
    out = []
    for _ in range(n):
        if out and r.random() < .35:
            out.append(out[-1])
        else:
            d = r.choice(DIGITS)
            out.append(r.choice(["zero", "oh", "oh", "nought"]) if d == "zero" or r.random() < .1 else d)
    return " ".join(out)


def number(r):
    k = r.random()
    if k < .38:
        whole = r.choice(["zero", "zero", "nought", "oh", ""] + NONZERO) if r.random() < .6 \
            else r.choice([r.choice(TEENS), _tens(r), digits(r, 2), digits(r, 3)])
        frac = digits(r, r.choice([1, 2, 2, 2, 3]))
        if r.random() < .08:
            frac = "double " + r.choice(DIGITS)
        return f"{whole} {r.choice(['point'] * 9 + ['decimal'])} {frac}".strip()
    if k < .58:
        return digits(r, r.choice([1, 2, 3, 3, 4, 5]))
    if k < .70:
        return r.choice(NONZERO) + " hundred" + r.choice(["", " and"]) + " " + \
            r.choice([r.choice(NONZERO), r.choice(TEENS), _tens(r)])
    if k < .76:
        return r.choice(NONZERO) + " " + r.choice(["hundred", "thousand"])
    if k < .82:
        return r.choice(NONZERO) + " " + _tens(r)
    if k < .94:
        return r.choice([r.choice(TEENS), _tens(r)])
    return r.choice(["double ", "triple "]) + r.choice(DIGITS) + r.choice([" point " + r.choice(DIGITS), "", ""])


def phrase(r):
    """One utterance inside the vocabulary."""
    k = r.random()
    if k < .42:
        q = r.choice(["greater than ", "more than ", "over ", "less than ", "greater than "]) if r.random() < .2 else ""
        s = q + number(r) + " " + r.choice(SPOKEN_UNITS)
    elif k < .57:
        s = digits(r, r.choice([2, 3, 4, 5, 6]))
    elif k < .64:
        s = "circuit " + r.choice([digits(r, 1), digits(r, 2), r.choice(TEENS), _tens(r)])
    elif k < .71:
        s = r.choice(["board ", "way ", "circuit ", "leg ", "end ", "ring ", "spur ", "socket ", "line ", "point ",
                      "page ", "phase ", "light ", "switch ", "joint "]) + r.choice(
            [r.choice(NATO), r.choice(NATO) + " " + digits(r, 1), digits(r, 1), digits(r, 2), r.choice(TEENS), _tens(r)])
    elif k < .77:
        s = " ".join(r.sample(NATO, r.choice([1, 2, 3])))
    elif k < .86:
        s = " ".join(r.sample([w for w in VOCABULARY if w not in ("a", "and")], r.choice([1, 2, 3])))
    elif k < .92:
        s = " ".join(r.sample(COMMANDS, r.choice([1, 1, 2])))
    else:
        s = r.choice(FIXED) + " " + r.choice(["", "", "", number(r)])
    return " ".join(s.split())


_OTHER = None


def other_words():
    """Common-looking English words that are not in the vocabulary."""
    global _OTHER
    if _OTHER is None:
        gold = json.loads(gzip.open(places.package("hibari") / "assets" / "lexicon_us_gold.json.gz").read())
        known = cmudict()
        _OTHER = sorted(w for w in gold if w.isalpha() and w.islower() and 3 <= len(w) <= 9 and w in known
                        and w not in VOCABULARY and len(known[w][0].split()) >= 2)
    return _OTHER


def talk(r):
    """One utterance of other English: sentences of everyday talk, or words from the dictionary."""
    if r.random() < .35:
        return r.choice(TALK)
    return " ".join(r.choice(other_words()) for _ in range(r.choice([1, 2, 3, 4, 5])))


def stream(seed, share_of_talk=.2):
    """Endless (text, is_talk)."""
    r = random.Random(seed)
    while True:
        is_talk = r.random() < share_of_talk
        text = talk(r) if is_talk else phrase(r)
        if all(pronunciations(w) for w in text.split()):
            yield text, is_talk


if __name__ == "__main__":
    it = stream(1)
    print("\n".join(str(next(it)) for _ in range(40)))
    print(len(other_words()), [f for f in FIXED if any(not pronunciations(w) for w in f.split())])
