//! Six stages of which five are implicit, of order 4, with a companion of order 3.
//!
//! L-stable, stiffly accurate, stages of order 2. Kennedy & Carpenter, *Appl. Numer. Math.* 44 (2003) 139, the implicit
//! half of their pair of order 4 (from memory; the tests check the order conditions).

use super::{Family, Method, Table};

/// The method.
pub const METHOD: Method = Method {
    name: "esdirk4",
    order: 4,
    estimated: 4,
    local: (0.03, 1.0),
    family: Family::Diagonal(Table {
        diagonal: 0.25,
        nodes: &[0.0, 0.5, 83.0 / 250.0, 31.0 / 50.0, 17.0 / 20.0, 1.0],
        rows: &[
            &[],
            &[0.25],
            &[8611.0 / 62500.0, -1743.0 / 31250.0],
            &[
                5012029.0 / 34652500.0,
                -654441.0 / 2922500.0,
                174375.0 / 388108.0,
            ],
            &[
                15267082809.0 / 155376265600.0,
                -71443401.0 / 120774400.0,
                730878875.0 / 902184768.0,
                2285395.0 / 8070912.0,
            ],
            &[
                82889.0 / 524892.0,
                0.0,
                15625.0 / 83664.0,
                69875.0 / 102672.0,
                -2260.0 / 8211.0,
            ],
        ],
        companion: &[
            4586570599.0 / 29645900160.0,
            0.0,
            178811875.0 / 945068544.0,
            814220225.0 / 1159782912.0,
            -3700637.0 / 11593932.0,
            61727.0 / 225920.0,
        ],
    }),
};
