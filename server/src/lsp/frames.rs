//! Messages out of a stream of bytes: `Content-Length: N`, an empty line, N bytes of JSON.
//!
//! A broken frame is told of, and the next `Content-Length` begins a new one, so that one slip of a client is not the end.

use serde_json::Value;

/// The largest message that is read, in bytes.
pub const MAX_MESSAGE: usize = 64 << 20;
/// The largest head of a message, in bytes.
const MAX_HEAD: usize = 8 << 10;
const LENGTH: &[u8] = b"content-length";

/// What was found in the stream.
#[derive(Clone, PartialEq, Debug)]
pub enum Frame {
    /// A message.
    Message(Value),
    /// Something that is none, with what is wrong.
    Broken(&'static str),
}

/// Bytes that came and have not been read yet.
#[derive(Default)]
pub struct Frames {
    bytes: Vec<u8>,
    /// How much of the front is done with.
    done: usize,
    /// Whether the next head is being looked for.
    lost: bool,
}

impl Frames {
    /// Takes what came.
    pub fn feed(&mut self, bytes: &[u8]) {
        if self.done > 0 {
            self.bytes.drain(..self.done);
            self.done = 0;
        }
        self.bytes.extend_from_slice(bytes);
    }

    /// The next whole frame; nothing where more bytes are needed.
    pub fn next(&mut self) -> Option<Frame> {
        if self.lost {
            let rest = &self.bytes[self.done..];
            let Some(at) = find(rest, LENGTH) else {
                // A head may have begun.
                self.done += (rest.len() + 1).saturating_sub(LENGTH.len());
                return None;
            };
            self.done += at;
            self.lost = false;
        }
        let rest = &self.bytes[self.done..];
        let Some((head, body)) = head_end(rest) else {
            return (rest.len() > MAX_HEAD).then(|| self.lose(1, "the head of the message does not end"));
        };
        let length = match length(&rest[..head]) {
            Ok(length) if length <= MAX_MESSAGE => length,
            Ok(_) => return Some(self.lose(body, "the message is too large")),
            Err(what) => {
                // What was left of the message before may stand in front.
                let start = find(&rest[1.min(head)..head], LENGTH).map_or(body, |at| at + 1);
                return Some(self.lose(start, what));
            }
        };
        let bytes = rest.get(body..body + length)?;
        match serde_json::from_slice(bytes) {
            Ok(value) => {
                self.done += body + length;
                Some(Frame::Message(value))
            }
            Err(_) => {
                // With a wrong length, the next message may begin inside of this one.
                let inner = find(bytes, LENGTH).unwrap_or(length.saturating_sub(LENGTH.len()));
                Some(self.lose(body + inner, "the message is no JSON"))
            }
        }
    }

    /// Leaves some bytes behind, and all that follow until the next head.
    fn lose(&mut self, bytes: usize, what: &'static str) -> Frame {
        self.done += bytes;
        self.lost = true;
        Frame::Broken(what)
    }
}

/// Where the head ends and where the body begins.
fn head_end(bytes: &[u8]) -> Option<(usize, usize)> {
    let limit = &bytes[..bytes.len().min(MAX_HEAD)];
    let at = find(limit, b"\r\n\r\n").map(|at| (at, at + 4));
    // Typed by hand, lines may end without a return.
    let bare = find(limit, b"\n\n").map(|at| (at, at + 2));
    match (at, bare) {
        (Some(a), Some(b)) => Some(if a.0 < b.0 { a } else { b }),
        (a, b) => a.or(b),
    }
}

/// The length that a head tells.
fn length(head: &[u8]) -> Result<usize, &'static str> {
    let missing = "the head of the message has no Content-Length";
    let head = std::str::from_utf8(head).map_err(|_| "the head of the message is no text")?;
    let mut found = None;
    for line in head.lines() {
        let Some((name, value)) = line.split_once(':') else {
            return Err("the head of the message has a strange line");
        };
        if name.trim().eq_ignore_ascii_case("content-length") {
            found = value.trim().parse().ok();
            if found.is_none() {
                return Err("the Content-Length is no number");
            }
        }
    }
    found.ok_or(missing)
}

/// Where the needle, in lower case, first stands in the text of whatever case.
fn find(hay: &[u8], needle: &[u8]) -> Option<usize> {
    hay.windows(needle.len()).position(|w| w.eq_ignore_ascii_case(needle))
}

#[cfg(test)]
mod tests {
    use super::*;
    use serde_json::json;

    /// Reads the bytes at once, and again one by one.
    #[track_caller]
    fn check(text: &str, expected: &[Frame]) {
        let all = |step: usize| {
            let (mut frames, mut out) = (Frames::default(), Vec::new());
            for chunk in text.as_bytes().chunks(step) {
                frames.feed(chunk);
                while let Some(frame) = frames.next() {
                    out.push(frame);
                }
            }
            out
        };
        assert_eq!(all(text.len()), expected);
        assert_eq!(all(1), expected);
    }

    fn one() -> Frame {
        Frame::Message(json!(1))
    }

    #[test]
    fn whole_messages() {
        check("Content-Length: 1\r\n\r\n1content-length:1\r\nContent-Type: a; charset=utf-8\r\n\r\n1", &[one(), one()]);
        check("Content-Length: 1\n\n1", &[one()]);
        check("Content-Length: 4\r\n\r\n\"θ\"", &[Frame::Message(json!("θ"))]);
    }

    #[test]
    fn after_a_broken_frame_the_next_one_is_found() {
        check(
            "X: 1\r\n\r\nContent-Length: 1\r\n\r\n1",
            &[Frame::Broken("the head of the message has no Content-Length"), one()],
        );
        check(
            "Content-Length: x\r\n\r\nContent-Length: 1\r\n\r\n1",
            &[Frame::Broken("the Content-Length is no number"), one()],
        );
        check(
            "Content-Length: 2\r\n\r\n{]Content-Length: 1\r\n\r\n1",
            &[Frame::Broken("the message is no JSON"), one()],
        );
        // Too long: the next message is in it.
        check(
            "Content-Length: 9\r\n\r\n{]Content-Length: 1\r\n\r\n1",
            &[Frame::Broken("the message is no JSON"), one()],
        );
        // Too short: the rest is a strange line.
        let frames = {
            let mut frames = Frames::default();
            frames.feed(b"Content-Length: 1\r\n\r\n{}Content-Length: 1\r\n\r\n1");
            std::iter::from_fn(move || frames.next()).collect::<Vec<_>>()
        };
        assert_eq!(frames.last(), Some(&one()), "{frames:?}");
    }

    #[test]
    fn nothing_grows_without_bound() {
        let mut frames = Frames::default();
        frames.feed(format!("Content-Length: {}\r\n\r\n", usize::MAX).as_bytes());
        assert_eq!(frames.next(), Some(Frame::Broken("the message is too large")));
        for _ in 0..100 {
            frames.feed(&[b'x'; 1000]);
            while frames.next().is_some() {}
            assert!(frames.bytes.len() <= 2 * MAX_HEAD);
        }
    }
}
