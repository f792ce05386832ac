//! Index types: one for each kind of entity, so that a cell number is never used as a vertex number.

macro_rules! index_type {
    ($(#[$doc:meta])* $name:ident, $kind:literal) => {
        $(#[$doc])*
        #[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash, Default)]
        pub struct $name(pub u32);

        impl $name {
            /// The number as an array index.
            #[must_use]
            #[inline]
            pub const fn index(self) -> usize {
                self.0 as usize
            }
        }

        impl std::fmt::Debug for $name {
            fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
                write!(f, concat!($kind, " {}"), self.0)
            }
        }

        impl std::fmt::Display for $name {
            fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
                write!(f, concat!($kind, " {}"), self.0)
            }
        }
    };
}

index_type!(
    /// Number of a vertex of the mesh.
    VertexId, "vertex"
);
index_type!(
    /// Number of a cell of the mesh.
    CellId, "cell"
);
index_type!(
    /// Number of a side: an edge in two dimensions, a point in one.
    SideId, "side"
);
index_type!(
    /// Number of a region: a named set of cells, usually one material.
    RegionId, "region"
);
index_type!(
    /// Number of a side name.
    SideNameId, "side name"
);
