//! The checks of `validation/`, computed through the library and held to their limits.
//!
//! `scripts/validate` runs this with `STILLWARM_WRITE=1`, which also writes the tables, the figures and the index.

#[path = "validation/bessel.rs"]
mod bessel;
#[path = "validation/harness.rs"]
mod harness;
#[path = "validation/known.rs"]
mod known;
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
    cylinder = "validation/cylinder.rs";
    composite = "validation/composite.rs";
    freezing = "validation/freezing.rs";
    freezing_line = "validation/freezing_line.rs";
    refreezing = "validation/refreezing.rs";
    round_a_sink = "validation/round_a_sink.rs";
    lumped = "validation/lumped.rs";
    cycling = "validation/cycling.rs";
    order = "validation/order.rs";
    numerical_error = "validation/numerical_error.rs";
    front_treatment = "validation/front_treatment.rs";
}
