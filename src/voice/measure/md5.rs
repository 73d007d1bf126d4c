//! MD5 (RFC 1321), for one thing only: which speakers were kept out of training is decided by it
//! (`src/voice/lab`), and the measurement must decide alike. It is no protection of anything.

/// The last decimal digit of a text's MD5 read as one big number, as the lab takes it.
pub(super) fn last_digit(text: &str) -> u32 {
    digest(text.as_bytes())
        .iter()
        .fold(0, |rest, byte| (rest * 256 + u32::from(*byte)) % 10)
}

const SHIFTS: [[u32; 4]; 4] = [
    [7, 12, 17, 22],
    [5, 9, 14, 20],
    [4, 11, 16, 23],
    [6, 10, 15, 21],
];

fn digest(message: &[u8]) -> [u8; 16] {
    let mut padded = message.to_vec();
    padded.push(0x80);
    padded.resize((message.len() + 9).next_multiple_of(64) - 8, 0);
    padded.extend((message.len() as u64 * 8).to_le_bytes());
    let mut state: [u32; 4] = [0x6745_2301, 0xefcd_ab89, 0x98ba_dcfe, 0x1032_5476];
    for block in padded.chunks_exact(64) {
        let words: Vec<u32> = block
            .chunks_exact(4)
            .map(|b| u32::from_le_bytes([b[0], b[1], b[2], b[3]]))
            .collect();
        let [mut a, mut b, mut c, mut d] = state;
        for i in 0..64 {
            let (mix, word) = match i / 16 {
                0 => ((b & c) | (!b & d), i),
                1 => ((d & b) | (!d & c), (5 * i + 1) % 16),
                2 => (b ^ c ^ d, (3 * i + 5) % 16),
                _ => (c ^ (b | !d), (7 * i) % 16),
            };
            // The constants are the sines of whole numbers, as the standard defines them.
            let sine = (((i + 1) as f64).sin().abs() * 4_294_967_296.0) as u32;
            let sum = a
                .wrapping_add(mix)
                .wrapping_add(sine)
                .wrapping_add(words[word])
                .rotate_left(SHIFTS[i / 16][i % 4]);
            (a, d, c, b) = (d, c, b, b.wrapping_add(sum));
        }
        for (part, add) in state.iter_mut().zip([a, b, c, d]) {
            *part = part.wrapping_add(add);
        }
    }
    let mut out = [0; 16];
    for (bytes, part) in out.chunks_exact_mut(4).zip(state) {
        bytes.copy_from_slice(&part.to_le_bytes());
    }
    out
}

#[cfg(test)]
mod tests {
    use super::*;

    #[track_caller]
    fn check(text: &str, hex: &str) {
        let got: String = digest(text.as_bytes())
            .iter()
            .map(|b| format!("{b:02x}"))
            .collect();
        assert_eq!(got, hex, "{text}");
    }

    /// RFC 1321, appendix A.5.
    #[test]
    fn the_suite_of_the_standard_holds() {
        check("", "d41d8cd98f00b204e9800998ecf8427e");
        check("abc", "900150983cd24fb0d6963f7d28e17f72");
        check("message digest", "f96b697d7cb7938d525a2f31aaf161d0");
        check(
            "12345678901234567890123456789012345678901234567890123456789012345678901234567890",
            "57edf4a22be3c955ac49da2e2107b67a",
        );
    }
}
