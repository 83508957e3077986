//! CRC-32 as the zip format uses it (reflected polynomial 0xEDB88320; PKWARE APPNOTE 6.3, section 4.4.7).

pub fn of(bytes: &[u8]) -> u32 {
    let mut crc = u32::MAX;
    let mut blocks = bytes.chunks_exact(8);
    for block in &mut blocks {
        // Eight tables take eight bytes a step; the result is that of the byte-wise loop.
        let low = crc ^ u32::from_le_bytes([block[0], block[1], block[2], block[3]]);
        crc = TABLES[7][(low & 0xff) as usize]
            ^ TABLES[6][(low >> 8 & 0xff) as usize]
            ^ TABLES[5][(low >> 16 & 0xff) as usize]
            ^ TABLES[4][(low >> 24) as usize]
            ^ TABLES[3][usize::from(block[4])]
            ^ TABLES[2][usize::from(block[5])]
            ^ TABLES[1][usize::from(block[6])]
            ^ TABLES[0][usize::from(block[7])];
    }
    for &byte in blocks.remainder() {
        crc = TABLES[0][(crc as u8 ^ byte) as usize] ^ crc >> 8;
    }
    !crc
}

/// `TABLES[k][b]`: the remainder of byte `b` followed by `k` zero bytes.
const TABLES: [[u32; 256]; 8] = {
    let mut tables = [[0; 256]; 8];
    let mut byte = 0;
    while byte < 256 {
        let mut crc = byte as u32;
        let mut bit = 0;
        while bit < 8 {
            crc = if crc & 1 == 1 {
                crc >> 1 ^ 0xedb8_8320
            } else {
                crc >> 1
            };
            bit += 1;
        }
        tables[0][byte] = crc;
        byte += 1;
    }
    let mut zeros = 1;
    while zeros < 8 {
        let mut byte = 0;
        while byte < 256 {
            let shorter: u32 = tables[zeros - 1][byte];
            tables[zeros][byte] = tables[0][(shorter & 0xff) as usize] ^ shorter >> 8;
            byte += 1;
        }
        zeros += 1;
    }
    tables
};

#[cfg(test)]
mod tests {
    use super::*;

    /// Check value of CRC-32/ISO-HDLC in the RevEng catalogue of parametrised CRC algorithms.
    #[test]
    fn val_check_value_of_the_catalogue() {
        assert_eq!(of(b"123456789"), 0xcbf4_3926);
        assert_eq!(of(b""), 0);
    }

    #[test]
    fn prop_eight_bytes_a_step_equal_bit_by_bit() {
        let bytes: Vec<u8> = (0..100_u32).map(|k| (k * k * 31 % 253) as u8).collect();
        for length in 0..bytes.len() {
            let mut crc = u32::MAX;
            for &byte in &bytes[..length] {
                crc ^= u32::from(byte);
                for _ in 0..8 {
                    crc = if crc & 1 == 1 {
                        crc >> 1 ^ 0xedb8_8320
                    } else {
                        crc >> 1
                    };
                }
            }
            assert_eq!(of(&bytes[..length]), !crc, "{length} bytes");
        }
    }
}
