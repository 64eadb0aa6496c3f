//! The registry of rules: for each finding what it is, why it costs, what to do
//! about it, what it deliberately leaves alone, and a small example.
//!
//! One entry per rule and one stable slug per entry; `carrywise explain` prints
//! the entry, the record carries the slug. The examples come from an invented
//! harbour tide-gauge logger. What counts as too wide or too many is common
//! practice without a published source, and is said in the entry.

use super::record::Severity;
use crate::source::distance;

/// Gates with more inputs than this are `gate-too-wide` (common practice: a
/// series stack of more than four devices is split).
pub const WIDE_GATE: u64 = 4;

/// Nets with more readers than this are `too-many-readers` (common practice).
pub const MANY_READERS: u64 = 32;

/// One rule.
#[derive(Debug)]
pub struct Rule {
    /// Its stable name.
    pub slug: &'static str,
    /// How much it matters unless a report says otherwise.
    pub severity: Severity,
    /// What it is, in one sentence.
    pub what: &'static str,
    /// Why it costs.
    pub why: &'static str,
    /// What to do.
    pub advice: &'static str,
    /// What it deliberately does not match.
    pub leaves_alone: &'static str,
    /// A small example.
    pub example: &'static str,
}

/// Every rule, in the order of the alphabet.
pub const RULES: &[Rule] = &[
    Rule {
        slug: "always-constant",
        severity: Severity::Note,
        what: "A gate has inputs, yet its output is the same whatever they carry.",
        why: "It costs area and readers, and it hides what the block really depends on. \
              In an old netlist it is often the rest of a feature that was tied off.",
        advice: "Check that the constant is meant; then replace the gate by it and let \
                 what it fed shrink.",
        leaves_alone: "Constants written as constants, and outputs that are constant only \
                       because two inputs never differ: a gate is judged by its own rows and \
                       by the constants among its inputs.",
        example: ".names flood_gate storm alarm\n11 1\n10 1\n0- 1\n\
                  `alarm` is 1 for every value of `flood_gate` and `storm`.",
    },
    Rule {
        slug: "assumption-unused",
        severity: Severity::Warning,
        what: "An assumption names places that are there, and changes nothing.",
        why: "It was written for another block or another revision; what it was meant to say \
              of this one goes unsaid.",
        advice: "Compare its names with the netlist, or take it out.",
        leaves_alone: "Arrival and required times, and excluded paths. An assumption whose \
                       pattern matches nothing at all is an error, not a finding.",
        example: "tied: {test_mode: {value: 0, why: \"off in the field\"}}\n\
                  and no gate reads `test_mode`.",
    },
    Rule {
        slug: "cell-without-function",
        severity: Severity::Warning,
        what: "An instance names a model the file does not contain, so its function is unknown.",
        why: "Paths end at it and start again behind it. A chain that runs through it is \
              not seen, and the depth told is only that of the parts around it.",
        advice: "Give the model in the same file, or its cell with --cells; then audit again.",
        leaves_alone: "Registers: paths end at them because they should.",
        example: ".subckt gauge_filter in=raw out=level\n\
                  with no `.model gauge_filter` in the file.",
    },
    Rule {
        slug: "chain-unproven",
        severity: Severity::Warning,
        what: "Something looks like a carry chain and was neither proven nor refuted \
               within the effort allowed.",
        why: "It is not in the list of chains, so a verdict that carry is not the limit \
              may be wrong.",
        advice: "Run again with a larger --effort, or look at the operands it names.",
        leaves_alone: "Candidates that were refuted: those are no chains, and not a word \
                       is lost on them.",
        example: "A 24-bit total whose operands pass a multiplier first.",
    },
    Rule {
        slug: "delay-model-does-not-fit",
        severity: Severity::Warning,
        what: "Depths are told by logical effort, and many gates have functions that no common \
               cell has.",
        why: "Logical effort is about static CMOS gates. A look-up table takes the same time \
              whatever function is in it, so for look-up tables the figures mean nothing.",
        advice: "Audit look-up tables with --delay unit, or give their delays as a table; map \
                 covers to cells before asking what they cost in CMOS.",
        leaves_alone: "Netlists in which fewer than one gate in ten is such a function (no source \
                       for the share), and every other delay model.",
        example: ".names a b c d e f y\nwith a dozen rows, in a netlist mapped to six-input tables.",
    },
    Rule {
        slug: "duplicate-chain",
        severity: Severity::Note,
        what: "Two chains add the same operands with the same carry-in, each in gates of \
               its own.",
        why: "One of them is area and load for nothing: every operand bit has the readers \
              of both. A rebuild of one alone leaves the other as slow as it was.",
        advice: "Let what reads the later chain read the earlier one, and drop the later. \
                 Where it was doubled on purpose, to share a load or for safety, accept it.",
        leaves_alone: "Chains that share gates between operands and results, chains with \
                       another carry-in (a + b and a + b + 1), and one that is only as \
                       wide as the lower part of another.",
        example: "`total + level` once for the display and once for the alarm.",
    },
    Rule {
        slug: "faster-than-needed",
        severity: Severity::Note,
        what: "A chain is built for speed, has time to spare, and a cheaper build would serve as \
               well.",
        why: "Its gates cost area and power, and no path of the block is shorter for them.",
        advice: "Take the cheaper build where the time to spare is not meant for what comes \
                 next; check after any other rebuild, which may use that time up.",
        leaves_alone: "Ripple chains, carry cells, chains on a longest path, chains in the \
                       recommended set, and proposals that would make any kind of path longer. \
                       At most 64 chains are looked at, those with the most to spare.",
        example: "A prefix adder for a 12-bit sample count, next to a 24-bit ripple total.",
    },
    Rule {
        slug: "gate-too-wide",
        severity: Severity::Note,
        what: "A gate has more than four inputs.",
        why: "One gate delay is charged for it, whatever it costs on the target. In most \
              cell libraries it is built from several cells, so a depth counted in whole \
              gates is too good to be true there.",
        advice: "Read the depth under --delay pairs as well, which charges wide gates for \
                 their inputs. On look-up tables of that many inputs nothing is wrong.",
        leaves_alone: "Gates of up to four inputs, whatever their function. The limit of \
                       four is common practice, from no published source.",
        example: ".names d0 d1 d2 d3 d4 d5 d6 d7 silent\n00000000 1",
    },
    Rule {
        slug: "loop-without-register",
        severity: Severity::Error,
        what: "Gates feed each other in a circle with no register in it.",
        why: "Such a block has no depth: it may oscillate or hold state nobody asked for. \
              carrywise cuts every net of the loop, treats it as a free input and audits \
              the rest, so figures behind the loop are too low.",
        advice: "Break the loop with a register, or mend the connection that closes it. \
                 Latches made of cross-coupled gates: replace each by a register.",
        leaves_alone: "Loops that pass a register or a black box.",
        example: ".names hold level latched\n1- 1\n-1 1\n.names latched hold\n1 1\n\
                  `hold` and `latched` wait for each other.",
    },
    Rule {
        slug: "net-driven-twice",
        severity: Severity::Error,
        what: "A net has more than one driver.",
        why: "What it carries is undefined. carrywise cuts the net and treats it as a \
              free input, so figures behind it are too low.",
        advice: "Keep one driver. Two blocks merged under one name are the usual cause: \
                 the lines of both drivers are given.",
        leaves_alone: "Several readers of a net, and several output ports on one net.",
        example: ".names a alarm\n1 1\n.names b alarm\n1 1",
    },
    Rule {
        slug: "net-without-driver",
        severity: Severity::Error,
        what: "A net is read and nothing drives it.",
        why: "What it carries is undefined. carrywise treats it as a free input, so \
              figures behind it are too low.",
        advice: "Drive it, list it among the inputs, or write the constant it stands for.",
        leaves_alone: "Input ports, and nets that nothing reads either.",
        example: ".inputs a\n.names a tide_ok alarm\n11 1\n\
                  `tide_ok` is neither an input nor driven.",
    },
    Rule {
        slug: "net-without-reader",
        severity: Severity::Note,
        what: "Nothing reads a net: a gate's output, a register or an input.",
        why: "What drives it costs area and loads its fan-ins for nothing. It is often the \
              rest of logic that somebody removed by half.",
        advice: "Remove it, or connect what was meant to read it. carrywise counts it \
                 before and after a rebuild alike.",
        leaves_alone: "Nets that an output, a register, an instance or an AIGER property \
                       reads, and constants.",
        example: ".names a b spare\n11 1\nwith `spare` in no other line.",
    },
    Rule {
        slug: "path-cut-here",
        severity: Severity::Warning,
        what: "The longest path begins or ends at a net that was cut.",
        why: "The real path may be longer than the one told, by an unknown amount.",
        advice: "Mend the fault at that net first; it has a finding of its own. Then \
                 audit again.",
        leaves_alone: "Cut nets that no longest path touches.",
        example: "The longest path of a logger starts at `tide_ok`, which nothing drives.",
    },
    Rule {
        slug: "ripple-on-longest-path",
        severity: Severity::Warning,
        what: "A longest path of the block runs through a chain in which every carry is \
               made from the carry just below it.",
        why: "Its depth grows with every bit, while a lookahead carry network grows with \
              the logarithm of the width.",
        advice: "Take the recommended rebuild, or widen the operands no further without \
                 one.",
        leaves_alone: "Ripple chains off the longest path: they are the cheapest way to \
                       add, and should stay.",
        example: "A 16-bit total `total + level` in which bit 15 waits for bit 0.",
    },
    Rule {
        slug: "too-deep",
        severity: Severity::Warning,
        what: "An output is ready later than it was asserted it must be, ends of paths are \
               reached after the target depth that was asked for, or paths that may take \
               several cycles need more of a cycle than any path of one.",
        why: "Whoever reads the output samples it before it has settled.",
        advice: "Shorten the path to it (the longest path of its kind is a start), or ask \
                 whether the required time is still what is meant.",
        leaves_alone: "Ends without a required time in the assumptions where no target depth \
                       was asked for.",
        example: "required: [{ports: \"alarm\", at: 12, why: \"the siren samples early\"}]\n\
                  and `alarm` is ready at 17 gate delays.",
    },
    Rule {
        slug: "too-many-readers",
        severity: Severity::Note,
        what: "A net has more than 32 readers.",
        why: "Under a delay model that counts gates its load is free; on silicon it needs \
              a buffer tree of its own, which no depth told here contains.",
        advice: "Expect buffers there. If the net is late, split its readers so that the \
                 path that matters sees few of them.",
        leaves_alone: "Register controls (clocks and enables), which have trees of their own, and \
                       constants. The limit of 32 is common practice, from no published \
                       source.",
        example: "`store`, the write enable of a 64-bit sample register.",
    },
    Rule {
        slug: "transparent-register",
        severity: Severity::Note,
        what: "A register is level-sensitive: while its control says so, its input passes \
               straight on.",
        why: "A path need not end there: what arrives while it is open runs on into the logic \
              behind it. carrywise ends paths at every register and tells besides how deep the \
              block is with all such registers open, each counted as one gate; where that is \
              deeper, the verdict is unknown.",
        advice: "Read both depths. If the two phases never overlap the smaller holds; otherwise \
                 make the register edge-triggered or budget the longer path.",
        leaves_alone: "Edge-triggered registers, and registers of which the file does not say \
                       what makes them store.",
        example: ".latch level held ah sample 0\nWhile `sample` is 1, `held` follows `level`.",
    },
];

/// The rule of that slug.
pub fn find(slug: &str) -> Option<&'static Rule> {
    RULES.iter().find(|rule| rule.slug == slug)
}

/// The rule whose slug is nearest to `word`, when one is near enough to be meant.
pub fn nearest(word: &str) -> Option<&'static Rule> {
    // Slugs are short; a longer word is near none of them, and need not be compared.
    if word.len() > 64 {
        return None;
    }
    let contained = RULES
        .iter()
        .find(|rule| word.len() >= 4 && rule.slug.contains(word));
    let by_distance = RULES
        .iter()
        .map(|rule| (distance(word, rule.slug), rule))
        .min_by_key(|&(distance, rule)| (distance, rule.slug))
        .filter(|&(distance, rule)| distance <= rule.slug.len() / 3)
        .map(|(_, rule)| rule);
    by_distance.or(contained)
}
