//! The checks of `validation/`, computed through the library and held to their limits.
//!
//! `scripts/validate` runs this with `STILLWARM_WRITE=1`, which also writes the tables, the figures and the index.

#[path = "validation/harness.rs"]
mod harness;
#[path = "validation/parts.rs"]
mod parts;
#[path = "validation/plot.rs"]
mod plot;

/// One test a check, and one that writes the index from all of them. A check is computed once.
macro_rules! checks {
    ($($(#[$about:meta])* $name:ident = $path:literal;)*) => {
        $(
            #[path = $path]
            mod $name;
        )*

        mod once {
            use std::sync::LazyLock;
            $(#[allow(non_upper_case_globals)]
            pub static $name: LazyLock<crate::harness::Check> = LazyLock::new(crate::$name::check);)*
        }

        mod gated {
            $(
                #[test]
                fn $name() {
                    crate::harness::gate(&crate::once::$name);
                }
            )*
        }

        #[test]
        fn index() {
            harness::write_index(&[$(&once::$name),*]);
        }
    };
}

checks! {
    steady = "validation/steady.rs";
}
