//! Index newtypes. All are 32 bits wide: a netlist of more than four thousand
//! million nets is refused by the builder, not truncated.

macro_rules! id {
    ($(#[$doc:meta])* $name:ident) => {
        $(#[$doc])*
        #[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Debug)]
        pub struct $name(pub(crate) u32);

        impl $name {
            /// The id as an array index.
            #[inline]
            pub fn index(self) -> usize {
                self.0 as usize
            }

            /// The id of array index `index`; panics past 32 bits.
            #[inline]
            pub fn new(index: usize) -> Self {
                Self(u32::try_from(index).expect("index fits 32 bits"))
            }
        }
    };
}

id!(
    /// One net (wire) of a netlist.
    NetId
);
id!(
    /// One gate, in the order of the source text.
    GateId
);
id!(
    /// One register (a latch of BLIF or AIGER).
    RegisterId
);
id!(
    /// One black box: an instance without a known function.
    BoxId
);
id!(
    /// One interned gate function.
    FunctionId
);
id!(
    /// One instance of a model; scope 0 is the top.
    ScopeId
);
