//! Phrases as testers say them, and what each means: tables, properties, an independent parser.
//!
//! The forms are those of the trade (common practice, no source) unless a line says otherwise.

use handsfull::speech::{Context, Control, Meaning, Reply, understand};

/// A meaning as one short line.
fn brief(meaning: &Meaning) -> String {
    match meaning {
        Meaning::Reading(reading) => match reading.unit() {
            Some(unit) => format!("{} {}", reading.figure(), unit.word()),
            None => reading.figure(),
        },
        Meaning::Place(place) => {
            let mut parts = Vec::new();
            parts.extend(place.board.as_ref().map(|b| format!("board {b}")));
            parts.extend(place.circuit.map(|c| format!("circuit {c}")));
            parts.extend(place.point.map(|p| format!("point {p}")));
            parts.extend(place.name.clone());
            parts.join(" ")
        }
        Meaning::Reply(Reply::Pick(n)) => format!("pick {n}"),
        Meaning::Reply(reply) => reply.word().into(),
        Meaning::Control(Control::Correction(Some(inner))) => {
            format!("correction {}", brief(inner))
        }
        Meaning::Control(Control::Test(test)) => format!("test {}", test.word()),
        Meaning::Control(Control::Stage(stage)) => format!("stage {}", stage.title()),
        Meaning::Control(Control::Reason(n)) => format!("reason {n}"),
        Meaning::Control(Control::Digits(digits)) => format!("digits {digits}"),
        Meaning::Control(control) => control.word().into(),
        Meaning::Ambiguous(all) => all.iter().map(brief).collect::<Vec<_>>().join(" or "),
        Meaning::Nothing(why) => format!("nothing: {why}"),
    }
}

/// What is wrong with the meaning of a phrase, if anything.
fn wrong(context: Context, said: &str, meant: &str) -> Option<String> {
    let got = understand(context, said);
    let right = match &got {
        Meaning::Nothing(_) => meant == "nothing",
        got => brief(got) == meant,
    };
    (!right).then(|| format!("{said:40} should be {meant}, is {}", brief(&got)))
}

#[track_caller]
fn check(context: Context, said: &str, meant: &str) {
    if let Some(wrong) = wrong(context, said, meant) {
        panic!("{wrong}");
    }
}

#[track_caller]
fn table(context: Context, table: &str) {
    let wrongs: Vec<String> = table
        .lines()
        .filter_map(|line| line.split_once("=>"))
        .filter_map(|(said, meant)| wrong(context, said.trim(), meant.trim()))
        .collect();
    assert!(wrongs.is_empty(), "\n{}", wrongs.join("\n"));
}

#[test]
fn readings_are_taken_exactly_as_said() {
    table(
        Context::All,
        "
        zero point five eight ohms            => 0.58 ohm
        nought point five eight               => 0.58
        naught point five eight               => 0.58
        oh point five eight                   => 0.58
        point five eight                      => 0.58
        point five eight ohms                 => 0.58 ohm
        nought decimal five eight             => 0.58
        nought point fifty eight              => 0.58
        nought point oh five                  => 0.05
        nought point nought five              => 0.05
        zero point zero five ohms             => 0.05 ohm
        point oh five                         => 0.05
        point zero five                       => 0.05
        point five                            => 0.5
        point three                           => 0.3
        nought point five                     => 0.5
        nought point five oh                  => 0.50
        zero point five zero                  => 0.50
        zero point zero zero                  => 0.00
        nought                                => 0
        zero ohms                             => 0 ohm
        nought point nought                   => 0.0
        one point one                         => 1.1
        one point one zero                    => 1.10
        one point one oh                      => 1.10
        one point one nought                  => 1.10
        one decimal two seven                 => 1.27
        one point three seven                 => 1.37
        one point two five zero               => 1.250
        ten point two                         => 10.2
        nineteen point nine nine              => 19.99
        ninety nine point nine nine           => 99.99
        double nine point five                => 99.5
        nine nine point five                  => 99.5
        nought point double five              => 0.55
        nought point oh double five           => 0.055
        zero point double oh                  => 0.00
        one hundred point five                => 100.5
        two hundred and thirty point five     => 230.5
        four eighty point five                => 480.5
        one                                   => 1
        nine                                  => 9
        ten                                   => 10
        fifteen                               => 15
        fifty                                 => 50
        twenty six                            => 26
        twenty meg                            => 20 megohm
        one five                              => 15
        one oh five                           => 105
        one zero five                         => 105
        triple nine                           => 999
        nine nine nine                        => 999
        double nine nine                      => 999
        nine double nine                      => 999
        one double six seven                  => 1667
        one six six seven                     => 1667
        one six six seven ohms                => 1667 ohm
        sixteen sixty seven                   => 1667
        nineteen oh five                      => 1905
        four eight zero meg                   => 480 megohm
        four eighty                           => 480
        four eighty meg                       => 480 megohm
        two fifty volts                       => 250 volt
        four hundred and eighty megohms       => 480 megohm
        two hundred and ninety nine megohms   => 299 megohm
        two hundred ninety nine megohms       => 299 megohm
        one hundred and five                  => 105
        one hundred and fifteen               => 115
        a hundred                             => 100
        a hundred and twenty                  => 120
        two hundred                           => 200
        fifteen hundred                       => 1500
        sixteen hundred and sixty seven       => 1667
        one thousand                          => 1000
        a thousand                            => 1000
        one thousand and twenty               => 1020
        one thousand and five                 => 1005
        one thousand six hundred and sixty seven => 1667
        two thousand five hundred             => 2500
        twenty thousand megohms               => 20000 megohm
        half an ohm                           => 0.5 ohm
        half a megohm                         => 0.5 megohm
        one and a half ohms                   => 1.5 ohm
        one two three four five six           => 123456
        ",
    );
}

#[test]
fn units_are_kept_as_said_and_left_out_when_not() {
    table(
        Context::All,
        "
        one ohm                       => 1 ohm
        fifty eight milliohms         => 58 milliohm
        fifty milliohms               => 50 milliohm
        one milliohm                  => 1 milliohm
        fifty eight milli ohms        => 58 milliohm
        two point two kilohms         => 2.2 kilohm
        two k ohms                    => 2 kilohm
        five megohms                  => 5 megohm
        five megaohms                 => 5 megohm
        five mega ohms                => 5 megohm
        five meg ohms                 => 5 megohm
        five megs                     => 5 megohm
        one gigohm                    => 1 gigohm
        two gig                       => 2 gigohm
        two thirty volts              => 230 volt
        two hundred and thirty volts  => 230 volt
        thirty milliamps              => 30 milliamp
        thirty two amps               => 32 amp
        seven point six kiloamps      => 7.6 kiloamp
        seven point six kay a         => 7.6 kiloamp
        seven point six k a           => 7.6 kiloamp
        twenty six milliseconds       => 26 millisecond
        one point five seconds        => 1.5 second
        fifty hertz                   => 50 hertz
        four percent                  => 4 percent
        four per cent                 => 4 percent
        thirty metres                 => 30 metre
        twenty degrees celsius        => 20 celsius
        twenty six mil                => 26 millisecond or 26 milliohm or 26 milliamp
        ",
    );
}

#[test]
fn bounds_and_displays_without_a_figure() {
    table(
        Context::All,
        "
        greater than nine nine nine megohms   => >999 megohm
        greater than nine nine nine           => >999
        over nine nine nine                   => >999
        nine ninety nine plus                 => >999
        nine nine nine plus                   => >999
        nine nine nine megohms plus           => >999 megohm
        nine nine nine plus megohms           => >999 megohm
        greater than nine ninety nine         => >999
        greater than two nine nine            => >299
        greater than two ninety nine          => >299
        greater than two hundred and ninety nine => >299
        over two hundred                      => >200
        more than five hundred                => >500
        above five hundred                    => >500
        in excess of five hundred             => >500
        greater than two gig                  => >2 gigohm
        greater than zero point five          => >0.5
        greater than triple nine              => >999
        greater than four eighty              => >480
        five hundred plus                     => >500
        less than nought point nought one     => <0.01
        less than zero point five megohms     => <0.5 megohm
        under one megohm                      => <1 megohm
        below nought point one                => <0.1
        open circuit                          => open
        open                                  => open
        open line                             => open
        o l                                   => open
        ol                                    => open
        O.L.                                  => open
        oh ell                                => open
        infinity                              => open
        no continuity                         => open
        over limit                            => open
        overload                              => open
        not getting anything                  => open
        over range                            => over-range
        over-range                            => over-range
        overrange                             => over-range
        off scale                             => over-range
        off the scale                         => over-range
        out of range                          => over-range
        maxed out                             => over-range
        ",
    );
}

#[test]
fn several_meanings_are_asked_about_never_guessed() {
    table(
        Context::All,
        "
        one thirty seven           => 137 or 1.37
        one thirty seven ohms      => 137 ohm or 1.37 ohm
        four fifteen               => 415 or 4.15
        one point ten              => 1.10 or 1.1
        point ten                  => 0.10 or 0.1
        correction one thirty seven => correction 137 or correction 1.37
        ",
    );
    table(
        Context::Ohms,
        "
        four eighty                => 480 or 4.80
        sixteen sixty seven        => 1667 or 16.67
        four eighty point five     => 480.5
        greater than two ninety nine => >299
        ",
    );
    table(
        Context::Insulation,
        "
        four eighty                => 480
        o l                        => over-range
        infinity                   => open
        line to earth              => test insulation-line-earth
        ",
    );
}

#[test]
fn places_are_called_by_number_line_and_letters() {
    table(
        Context::All,
        "
        circuit one five                     => circuit 15
        circuit fifteen                      => circuit 15
        circuit twelve                       => circuit 12
        circuit seven                        => circuit 7
        circuit 15                           => circuit 15
        C7                                   => circuit 7
        way seven                            => circuit 7
        number seven                         => circuit 7
        circuit twenty one                   => circuit 21
        circuit one oh five                  => circuit 105
        circuit one hundred and five         => circuit 105
        circuit one fifteen                  => circuit 115
        way four line two                    => circuit 4L2
        way four l two                       => circuit 4L2
        way four L2                          => circuit 4L2
        circuit 4L2                          => circuit 4L2
        way four phase two                   => circuit 4L2
        circuit four line three              => circuit 4L3
        way four brown                       => circuit 4L1
        way four grey                        => circuit 4L3
        board delta bravo one                => board DB1
        board d b one                        => board DB1
        board db1                            => board DB1
        board DB dash one A                  => board DB1A
        board delta bravo one two            => board DB12
        board delta bravo twelve             => board DB12
        board mike sierra bravo              => board MSB
        board msb                            => board MSB
        board mike sierra bravo one alpha    => board MSB1A
        board alfa                           => board A
        board one                            => board 1
        board delta bravo one circuit twelve => board DB1 circuit 12
        board delta bravo one circuit twelve point three => board DB1 circuit 12 point 3
        board delta bravo one way four line two => board DB1 circuit 4L2
        circuit twelve point three           => circuit 12 point 3
        circuit twelve socket three          => circuit 12 point 3
        go to circuit twelve                 => circuit 12
        circuit number seven                 => circuit 7
        DB1 circuit 15                       => board DB1 circuit 15
        delta bravo one circuit one five     => board DB1 circuit 15
        socket three                         => point 3
        light two                            => point 2
        spur three                           => point 3
        at point three                       => point 3
        socket one two                       => point 12
        circuit two hundred                  => nothing
        circuit zero                         => nothing
        ",
    );
    check(Context::Tick, "point three", "point 3");
    check(Context::Gate, "point three", "point 3");
    check(Context::Gate, "ring", "stage Ring final circuits");
}

#[test]
fn replies() {
    table(
        Context::All,
        "
        affirm               => affirm
        affirmative          => affirm
        yes                  => affirm
        correct              => affirm
        that's correct       => affirm
        negative             => negative
        no                   => negative
        wrong                => negative
        first                => pick 1
        the second one       => pick 2
        third                => pick 3
        keep as found        => keep-as-found
        measure again        => measure-again
        re-measure           => measure-again
        done                 => done
        ready                => done
        acknowledged         => done
        polarity correct     => confirmed
        polarity's good      => confirmed
        polarity wrong       => not-confirmed
        pass                 => confirmed
        fail                 => not-confirmed
        ",
    );
    table(
        Context::Pick,
        "
        one      => pick 1
        two      => pick 2
        three    => pick 3
        neither  => negative
        second   => pick 2
        ",
    );
    table(
        Context::Tick,
        "
        correct  => confirmed
        wrong    => not-confirmed
        affirm   => affirm
        tick     => confirmed
        ",
    );
    table(
        Context::Confirm,
        "
        negative zero point five nine           => correction 0.59
        negative correction zero point five nine => correction 0.59
        no, correction: zero point five nine    => correction 0.59
        wait one                                => standby
        zero point five                         => nothing
        ",
    );
}

#[test]
fn commands() {
    table(
        Context::All,
        "
        say again                          => say-again
        read back                          => say-again
        disregard                          => disregard
        scratch that                       => disregard
        standby                            => standby
        stand by                           => standby
        wait one                           => standby
        resume                             => resume
        carry on                           => resume
        correction                         => correction
        correction zero point five nine    => correction 0.59
        correction circuit one two         => correction circuit 12
        back                               => back
        go back                            => back
        next                               => next
        skip                               => skip
        come back to it                    => skip
        help                               => help
        what is open                       => list-open
        what's open                        => list-open
        list open                          => list-open
        list links                         => list-links
        why                                => why
        link in                            => link-in
        link fitted                        => link-in
        link out                           => link-out
        link removed                       => link-out
        link off                           => link-out
        digit by digit                     => digit-by-digit
        stop                               => stop
        take a note                        => note
        note                               => note
        reason four                        => reason 4
        insulation                         => stage Insulation resistance
        continuity                         => stage Continuity of protective conductors
        ring                               => stage Ring final circuits
        polarity                           => test polarity
        r one plus r two                   => test r1r2
        R1+R2                              => test r1r2
        r two                              => test r2
        ring line                          => test ring-r1
        line line                          => test ring-r1
        ring r two                         => test ring-r2
        ring line to neutral               => test ring-line-neutral
        ring line to earth                 => test ring-line-earth
        insulation line to neutral         => test insulation-line-neutral
        insulation live to earth           => test insulation-line-earth
        insulation lives to earth          => test insulation-lives-earth
        insulation line one to line two    => test insulation-l1-l2
        z s                                => test zs
        phase rotation                     => test phase-sequence
        ",
    );
}

#[test]
fn typed_figures_and_symbols_are_read_as_if_said() {
    table(
        Context::All,
        "
        0.58 ohms     => 0.58 ohm
        0.58ohms      => 0.58 ohm
        0.50          => 0.50
        .58           => 0.58
        >299 MΩ       => >299 megohm
        58mΩ          => 58 milliohm
        7.6kA         => 7.6 kiloamp
        26ms          => 26 millisecond
        400V          => 400 volt
        twenty-six    => 26
        ZERO POINT FIVE, OHMS. => 0.5 ohm
        ",
    );
}

#[test]
fn what_is_no_phrase_is_nothing() {
    for said in [
        "",
        "banana",
        "zero five",
        "oh",
        "point",
        "zero point",
        "five point",
        "ohms",
        "greater than",
        "zero point five point eight",
        "twenty ten",
        "one two three four five six seven",
        "minus zero point five",
        "affirm please",
        "circuit",
        "board",
        "way line two",
        "[unk]",
        "zero point five [unk]",
        "two too",
    ] {
        check(Context::All, said, "nothing");
    }
}

#[test]
fn a_phrase_of_another_prompt_says_so() {
    let Meaning::Nothing(why) = understand(Context::Confirm, "circuit twelve") else {
        panic!("a circuit is not asked for when a value is being confirmed");
    };
    assert_eq!(why, "\"circuit twelve\" is not asked for here");
}

#[test]
fn a_jobs_own_names_are_places_like_any_other() {
    use handsfull::{domain::place::Place, speech::Phrases};

    let board = || Place {
        board: Some("DB2".to_owned().try_into().expect("a board")),
        ..Place::default()
    };
    let names = [
        ("boiler house".to_owned(), board()),
        ("Mezzanine".to_owned(), Place::default()),
    ];
    let phrases = Phrases::with_places(&names).expect("two names");
    for (context, said, meant) in [
        (Context::All, "boiler house", "board DB2 boiler house"),
        (
            Context::Ohms,
            "go to boiler house",
            "board DB2 boiler house",
        ),
        (Context::Gate, "mezzanine", "mezzanine"),
        (
            Context::Ohms,
            "correction boiler house",
            "correction board DB2 boiler house",
        ),
    ] {
        assert_eq!(brief(&phrases.understand(context, said)), meant, "{said}");
        let words: Vec<&str> = said.split(' ').collect();
        assert!(phrases.word_graph(context).cost(&words).is_some(), "{said}");
    }
    assert!(phrases.help(Context::Ohms).contains(&"boiler house".into()));
    check(Context::All, "boiler house", "nothing");

    for (name, message) in [
        (
            "büro",
            "the place name `büro` cannot be said; use words of letters, such as `boiler house`",
        ),
        (
            "circuit one",
            "the place name `circuit one` already means something; choose another",
        ),
        (
            "",
            "the place name `` cannot be said; use words of letters, such as `boiler house`",
        ),
    ] {
        let error = Phrases::with_places(&[(name.into(), Place::default())]).expect_err(name);
        assert_eq!(error.to_string(), message);
    }
    let twice = [
        ("loft".to_owned(), Place::default()),
        ("Loft".to_owned(), Place::default()),
    ];
    let error = Phrases::with_places(&twice).expect_err("twice");
    assert_eq!(
        error.to_string(),
        "the place name `loft` is given twice; leave one of them out"
    );
}

#[test]
fn a_missing_point_after_zero_is_asked_for() {
    let Meaning::Nothing(why) = understand(Context::Ohms, "zero five eight") else {
        panic!("zero five eight is no reading");
    };
    assert_eq!(why, "after \"zero\" say the point: \"zero point five\"");
}

#[test]
fn digit_by_digit_takes_digits_and_the_point_alone() {
    table(
        Context::Digits,
        "
        zero            => digits 0
        nought          => digits 0
        five            => digits 5
        point           => digits .
        point five      => digits .5
        zero point five => digits 0.5
        affirm          => affirm
        negative        => negative
        say again       => say-again
        fifteen         => nothing
        done            => nothing
        ",
    );
}
