//! Building with covers: what one gate of any function takes in at once.
//!
//! A combine node of `k` parts is one gate of `2k-1` inputs. The ends are
//! absorbed: a leaf's operands stand in for its g and p (as many inputs, one
//! level less), so a span of up to ⌊F/2⌋ positions is one gate of the operands,
//! and a sum takes in its carry's last combination, `p ⊕ (G3 + P3·G2 + P3·P2·G1)`
//! in six inputs. A node of too many parts is nested: the run of neighbours that
//! is ready first becomes a node of its own, again and again; order is kept, for
//! the combination does not commute.
//!
//! Functions are computed on words of projections, so constant and repeated
//! operands fold by themselves.

use super::build::{GateSink, Propagate, Spans};
use super::carry_network::{Node, NodeId};
use super::gates::first_merge;
use super::table::Table;

/// A span as a cover reads it.
#[derive(Clone, Copy)]
enum Part<S> {
    /// A position, by its operands.
    Leaf(usize),
    /// G, and P unless nothing below reads through it.
    Span { generate: S, propagate: Option<S> },
}

impl<K: GateSink> Spans<'_, K> {
    /// Whether the whole span is one cover of the operands.
    pub(super) fn is_direct(&self, node: NodeId) -> bool {
        let span = self.network.span(node);
        let positions = (span.high + 1 - span.low.max(0)) as usize;
        let operands = 2 * positions + usize::from(span.low < 0);
        self.cover_width.is_some_and(|width| operands <= width)
    }

    /// The G of a combine node.
    pub(super) fn cover_generate(&mut self, node: NodeId, width: usize) -> K::Signal {
        let parts = self.few_parts(node, width);
        self.generate_of(&parts, width)
    }

    /// The P of a combine node.
    pub(super) fn cover_propagate(&mut self, node: NodeId, width: usize) -> K::Signal {
        let parts = self.parts(node, true);
        self.propagate_of(&parts, width)
    }

    /// The sum of a position with the carry `into` it.
    pub(super) fn cover_sum(&mut self, position: usize, into: NodeId, width: usize) -> K::Signal {
        let parts = self.few_parts(into, width);
        let (least, most) = (pins(&parts, false), pins(&parts, true));
        let mut table = Table::new(self.gates.zero());
        let (a, b) = (self.addends.a[position], self.addends.b[position]);
        let sum = if 2 + least <= width {
            let half = table.pin(a) ^ table.pin(b);
            half ^ self.generate_word(&mut table, &parts, 2 + most <= width)
        } else if least < width {
            let half = self.half_sum(position);
            table.pin(half) ^ self.generate_word(&mut table, &parts, most < width)
        } else {
            let carry = self.generate(into);
            table.pin(a) ^ table.pin(b) ^ table.pin(carry)
        };
        table.into_gate(sum, &mut self.gates)
    }

    /// The parts of a span, most significant first; the lowest with its P only
    /// where `lowest_propagates`.
    fn parts(&mut self, node: NodeId, lowest_propagates: bool) -> Vec<Part<K::Signal>> {
        if self.is_direct(node) {
            let span = self.network.span(node);
            let leaves = (span.low.max(0)..=span.high).rev();
            let mut parts: Vec<_> = leaves.map(|i| Part::Leaf(i as usize)).collect();
            if let Some(carry_in) = self.addends.carry_in.filter(|_| span.low < 0) {
                parts.push(Part::Span {
                    generate: carry_in,
                    propagate: None,
                });
            }
            return parts;
        }
        let network = self.network;
        let Node::Combine(ids) = network.node(node) else {
            unreachable!("leaves and the carry-in are direct");
        };
        let mut parts = Vec::with_capacity(ids.len());
        for (i, &id) in ids.iter().enumerate() {
            parts.push(match network.node(id) {
                Node::Leaf(position) => Part::Leaf(position),
                _ => {
                    let propagates = lowest_propagates || i + 1 < ids.len();
                    Part::Span {
                        generate: self.generate(id),
                        propagate: propagates.then(|| self.propagate(id)),
                    }
                }
            });
        }
        parts
    }

    /// The parts of a span, nested until one cover takes them.
    fn few_parts(&mut self, node: NodeId, width: usize) -> Vec<Part<K::Signal>> {
        let mut parts = self.parts(node, false);
        let most = width.div_ceil(2);
        if parts.len() <= most {
            return parts;
        }
        let mut take = first_merge(parts.len(), most);
        while parts.len() > most {
            let run = self.earliest_run(&parts, take);
            let end = run + take;
            let generate = self.generate_of(&parts[run..end], width);
            let propagate = (end < parts.len()).then(|| self.propagate_of(&parts[run..end], width));
            let merged = Part::Span {
                generate,
                propagate,
            };
            parts.splice(run..end, [merged]);
            take = most;
        }
        parts
    }

    /// Where the run of `length` neighbours starts that is ready first; the
    /// least significant of several.
    fn earliest_run(&self, parts: &[Part<K::Signal>], length: usize) -> usize {
        let ready: Vec<i32> = parts.iter().map(|&part| self.ready(part)).collect();
        let runs = ready.windows(length).enumerate().rev();
        let latest = runs.map(|(start, run)| (run.iter().copied().max(), start));
        latest
            .min_by_key(|&(ready, _)| ready)
            .map_or(0, |(_, start)| start)
    }

    fn ready(&self, part: Part<K::Signal>) -> i32 {
        let sink = &*self.gates.sink;
        match part {
            Part::Leaf(i) => {
                let (a, b) = (self.addends.a[i], self.addends.b[i]);
                sink.arrival(a).max(sink.arrival(b))
            }
            Part::Span {
                generate,
                propagate,
            } => {
                let generate = sink.arrival(generate);
                propagate.map_or(generate, |p| generate.max(sink.arrival(p)))
            }
        }
    }

    fn generate_of(&mut self, parts: &[Part<K::Signal>], width: usize) -> K::Signal {
        let mut table = Table::new(self.gates.zero());
        let operands = pins(parts, true) <= width;
        let word = self.generate_word(&mut table, parts, operands);
        table.into_gate(word, &mut self.gates)
    }

    /// G of adjacent parts as a word of the table; the lowest, when a leaf, by
    /// its operands or by its g.
    fn generate_word(
        &mut self,
        table: &mut Table<K::Signal>,
        parts: &[Part<K::Signal>],
        operands: bool,
    ) -> u64 {
        let mut word = 0;
        for (i, &part) in parts.iter().enumerate().rev() {
            let lowest = i + 1 == parts.len();
            word = match part {
                Part::Leaf(position) if lowest && !operands => {
                    let generate = self.generate(self.network.leaf(position));
                    table.pin(generate)
                }
                Part::Leaf(position) => {
                    let a = table.pin(self.addends.a[position]);
                    let b = table.pin(self.addends.b[position]);
                    a & b | (a | b) & word
                }
                Part::Span { generate, .. } if lowest => table.pin(generate),
                Part::Span {
                    generate,
                    propagate,
                } => {
                    let propagate = propagate.expect("something lies below");
                    table.pin(generate) | table.pin(propagate) & word
                }
            };
        }
        word
    }

    /// P of adjacent parts, all of which have one.
    fn propagate_of(&mut self, parts: &[Part<K::Signal>], width: usize) -> K::Signal {
        let leaves = parts.iter().filter(|p| matches!(p, Part::Leaf(_))).count();
        if parts.len() + leaves <= width {
            let mut table = Table::new(self.gates.zero());
            let mut word = !0;
            for &part in parts {
                word &= match part {
                    Part::Leaf(position) => {
                        let a = table.pin(self.addends.a[position]);
                        let b = table.pin(self.addends.b[position]);
                        match self.rule {
                            Propagate::Or => a | b,
                            Propagate::Xor => a ^ b,
                        }
                    }
                    Part::Span { propagate, .. } => {
                        table.pin(propagate.expect("something lies below"))
                    }
                };
            }
            return table.into_gate(word, &mut self.gates);
        }
        let mut signals = Vec::with_capacity(parts.len());
        for &part in parts {
            signals.push(match part {
                Part::Leaf(position) => self.propagate(self.network.leaf(position)),
                Part::Span { propagate, .. } => propagate.expect("something lies below"),
            });
        }
        self.gates.and(&signals)
    }
}

/// Inputs of a cover of adjacent parts, its lowest leaf by operands or by g.
fn pins<S>(parts: &[Part<S>], operands: bool) -> usize {
    let lowest_is_leaf = matches!(parts.last(), Some(Part::Leaf(_)));
    2 * parts.len() - usize::from(!(operands && lowest_is_leaf))
}
