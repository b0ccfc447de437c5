//! How a run and the process that works on one workbook speak: lengths, then what is that long.

use std::io::{self, Read, Write};

use serde::Serialize;
use serde::de::DeserializeOwned;

/// An order or an answer is shorter than this; the bytes of a workbook are not bounded here.
const MOST: u64 = 256 << 20;

/// Sends a value.
pub fn send<T: Serialize>(to: &mut impl Write, value: &T) -> io::Result<()> {
    let text = serde_json::to_vec(value)?;
    send_bytes(to, &text)
}

/// Sends bytes.
pub fn send_bytes(to: &mut impl Write, bytes: &[u8]) -> io::Result<()> {
    to.write_all(&(bytes.len() as u64).to_le_bytes())?;
    to.write_all(bytes)?;
    to.flush()
}

/// The length of what comes next.
pub fn length(from: &mut impl Read) -> io::Result<u64> {
    let mut length = [0; 8];
    from.read_exact(&mut length)?;
    Ok(u64::from_le_bytes(length))
}

/// Receives a value.
pub fn receive<T: DeserializeOwned>(from: &mut impl Read) -> io::Result<T> {
    Ok(serde_json::from_slice(&receive_bytes(from)?)?)
}

/// Receives bytes.
pub fn receive_bytes(from: &mut impl Read) -> io::Result<Vec<u8>> {
    let length = length(from)?;
    if length > MOST {
        return Err(io::ErrorKind::InvalidData.into());
    }
    let mut bytes = Vec::new();
    from.take(length).read_to_end(&mut bytes)?;
    if (bytes.len() as u64) < length { Err(io::ErrorKind::UnexpectedEof.into()) } else { Ok(bytes) }
}

#[cfg(test)]
mod tests {
    use super::{length, receive, send, send_bytes};

    #[test]
    fn what_is_sent_is_received() {
        let mut pipe = Vec::new();
        send(&mut pipe, &vec![0.1_f64, 1e-310, -0.0]).unwrap();
        send_bytes(&mut pipe, b"PK").unwrap();
        let mut from = &pipe[..];
        assert_eq!(receive::<Vec<f64>>(&mut from).unwrap(), [0.1, 1e-310, -0.0]);
        assert_eq!((length(&mut from).unwrap(), from), (2, &b"PK"[..]));
        assert!(receive::<Vec<f64>>(&mut &pipe[..20]).is_err(), "cut short");
        assert!(receive::<Vec<f64>>(&mut &[0xff; 16][..]).is_err(), "not a length");
    }
}
