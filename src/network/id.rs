//! Ids. Each is made only by the table it indexes, so an id never points outside its network.

macro_rules! id {
    ($(#[$doc:meta])* $name:ident) => {
        $(#[$doc])*
        #[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
        pub struct $name(u32);

        impl $name {
            pub(crate) fn at(index: usize) -> Self {
                Self(u32::try_from(index).unwrap_or(u32::MAX))
            }

            /// Position in the table.
            #[must_use]
            pub fn index(self) -> usize {
                self.0 as usize
            }
        }
    };
}

id!(
    /// A node; joins written `a -- b` are already one node.
    NodeId
);
id!(
    /// A part after devices have been taken apart into parts.
    ElementId
);
id!(
    /// A device statement such as `U1 is opamp(…)`.
    DeviceId
);
id!(
    /// One exact relation, releasable by itself.
    RelationId
);
id!(
    /// An independent excitation that questions are asked over.
    DriveId
);

impl NodeId {
    /// The reference node.
    pub const GROUND: Self = Self(0);
}
