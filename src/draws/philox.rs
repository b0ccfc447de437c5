//! Random numbers by counting: each draw's numbers are a function of the seed and the number of the draw alone.
//!
//! Philox4x64-10 of J. K. Salmon, M. A. Moraes, R. O. Dror and D. E. Shaw, "Parallel random numbers: as easy as 1, 2, 3",
//! Proceedings of the 2011 conference on high performance computing (SC11). The seed is the key, the draw the counter, so
//! that no state passes from draw to draw and threads may share the draws among themselves as they like.

const MULTIPLIERS: [u64; 2] = [0xD2E7_470E_E14C_6C93, 0xCA5A_8263_9512_1157];
const STEPS: [u64; 2] = [0x9E37_79B9_7F4A_7C15, 0xBB67_AE85_84CA_A73B];
const ROUNDS: usize = 10;

/// Four random words for a counter under a key.
#[inline]
fn philox(mut counter: [u64; 4], mut key: [u64; 2]) -> [u64; 4] {
    for _ in 0..ROUNDS {
        let a = u128::from(MULTIPLIERS[0]) * u128::from(counter[0]);
        let b = u128::from(MULTIPLIERS[1]) * u128::from(counter[2]);
        counter = [
            (b >> 64) as u64 ^ counter[1] ^ key[0],
            b as u64,
            (a >> 64) as u64 ^ counter[3] ^ key[1],
            a as u64,
        ];
        key = [key[0].wrapping_add(STEPS[0]), key[1].wrapping_add(STEPS[1])];
    }
    counter
}

/// Four independent numbers of a draw, uniform on the open interval from 0 to 1: odd multiples of 2^-53.
#[inline]
pub(super) fn uniforms(seed: u64, draw: u64) -> [f64; 4] {
    philox([draw, 0, 0, 0], [seed, 0]).map(|word| ((word >> 12) as f64 + 0.5) * (1.0 / (1u64 << 52) as f64))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The known answers for philox4x64-10 that the authors publish with their library Random123 (kat_vectors).
    #[test]
    fn the_published_vectors() {
        let ones = u64::MAX;
        for (counter, key, words) in [
            (
                [0; 4],
                [0; 2],
                [0x1655_4d9e_ca36_314c, 0xdb20_fe9d_672d_0fdc, 0xd7e7_72ce_e186_176b, 0x7e68_b68a_ec7b_a23b],
            ),
            (
                [ones; 4],
                [ones; 2],
                [0x87b0_92c3_013f_e90b, 0x438c_3c67_be8d_0224, 0x9cc7_d7c6_9cd7_77b6, 0xa09c_aebf_594f_0ba0],
            ),
            (
                [0x243f_6a88_85a3_08d3, 0x1319_8a2e_0370_7344, 0xa409_3822_299f_31d0, 0x082e_fa98_ec4e_6c89],
                [0x4528_21e6_38d0_1377, 0xbe54_66cf_34e9_0c6c],
                [0xa528_f454_03e6_1d95, 0x38c7_2dbd_566e_9788, 0xa5a1_610e_72fd_18b5, 0x57bd_43b5_e52b_7fe6],
            ),
        ] {
            assert_eq!(philox(counter, key), words);
        }
    }

    #[test]
    fn numbers_are_inside_the_interval_and_symmetric() {
        let of = |word: u64| ((word >> 12) as f64 + 0.5) * (1.0 / (1u64 << 52) as f64);
        assert!(of(0) > 0.0 && of(u64::MAX) < 1.0);
        assert_eq!(of(0), 1.0 - of(u64::MAX));
        assert_ne!(uniforms(1, 0), uniforms(2, 0));
        assert_ne!(uniforms(1, 0), uniforms(1, 1));
    }
}
