//! Messages on a stream of bytes: a header with the length, a blank line, the JSON.
//!
//! The one idea: whatever comes in, the reader finds the next header and goes on. tower-lsp's own loop ends at the
//! first message that is no JSON, and keeps any length in memory; so the frames are read here. Traps: a header without
//! a length leaves no way to know where its body ends, so that everything is passed over up to the next
//! `Content-Length`; lines of a header are bounded, too.

use std::io;

use tokio::io::{AsyncBufRead, AsyncBufReadExt, AsyncReadExt, AsyncWrite, AsyncWriteExt};

/// No longer message is taken, in bytes: the largest file that is read, with its quotation marks and line ends escaped.
pub const LARGEST_MESSAGE: u64 = 96 << 20;

/// No longer line of a header is looked at, in bytes.
const LONGEST_LINE: u64 = 4096;

/// The field that says how long a message is.
const LENGTH: &str = "content-length:";

/// What was found on the stream.
#[derive(Debug, PartialEq, Eq)]
pub enum Frame {
    /// The bytes of a message.
    Message(Vec<u8>),
    /// A message of so many bytes, which was passed over.
    TooLarge(u64),
    /// Bytes that are no header were passed over.
    Garbage,
    /// The stream ended.
    End,
}

/// Reads frames.
pub struct FrameReader<R> {
    input: R,
    /// A length that stood behind passed-over bytes.
    found: Option<u64>,
}

impl<R: AsyncBufRead + Unpin> FrameReader<R> {
    /// Nothing is read yet.
    pub const fn new(input: R) -> Self {
        Self { input, found: None }
    }

    /// The next frame. A stream that breaks has ended.
    pub async fn next(&mut self) -> Frame {
        self.read().await.unwrap_or(Frame::End)
    }

    async fn read(&mut self) -> io::Result<Frame> {
        let mut length = self.found.take();
        loop {
            let Some(line) = self.line().await? else { return Ok(Frame::End) };
            if line.is_empty() {
                match length {
                    Some(length) => return self.body(length).await,
                    // Blank lines between messages harm nobody.
                    None => continue,
                }
            }
            match field(&line) {
                Field::Length(number) => length = Some(number),
                Field::Other => {}
                Field::Garbage => return self.pass_over(&line).await,
            }
        }
    }

    /// Bytes that are no header: looks for the next length, and tells of it once.
    async fn pass_over(&mut self, line: &str) -> io::Result<Frame> {
        let mut line = line.to_owned();
        loop {
            if let Some(number) = length_in(&line) {
                self.found = Some(number);
                return Ok(Frame::Garbage);
            }
            match self.line().await? {
                Some(next) => line = next,
                None => return Ok(Frame::End),
            }
        }
    }

    /// A line without its end, or as much of it as is looked at.
    async fn line(&mut self) -> io::Result<Option<String>> {
        let mut bytes = Vec::new();
        let read = (&mut self.input).take(LONGEST_LINE).read_until(b'\n', &mut bytes).await?;
        if read == 0 {
            return Ok(None);
        }
        let text = String::from_utf8_lossy(&bytes);
        Ok(Some(text.trim_end_matches(['\r', '\n']).to_owned()))
    }

    async fn body(&mut self, length: u64) -> io::Result<Frame> {
        let mut body = (&mut self.input).take(length);
        if length > LARGEST_MESSAGE {
            tokio::io::copy_buf(&mut body, &mut tokio::io::sink()).await?;
            return Ok(Frame::TooLarge(length));
        }
        let mut bytes = Vec::new();
        let read = body.read_to_end(&mut bytes).await?;
        Ok(if (read as u64) < length { Frame::End } else { Frame::Message(bytes) })
    }
}

/// A line of a header.
enum Field {
    Length(u64),
    /// `Content-Type`, or one of a later version.
    Other,
    Garbage,
}

fn field(line: &str) -> Field {
    let Some((name, _)) = line.split_once(':') else { return Field::Garbage };
    let is_name = !name.is_empty() && name.chars().all(|c| c.is_ascii_alphanumeric() || c == '-');
    if !is_name {
        return Field::Garbage;
    }
    if !name.eq_ignore_ascii_case("content-length") {
        return Field::Other;
    }
    length_in(line).map_or(Field::Garbage, Field::Length)
}

/// The last length that a line names.
fn length_in(line: &str) -> Option<u64> {
    let at = line.to_ascii_lowercase().rfind(LENGTH)?;
    line.get(at + LENGTH.len()..)?.trim().parse().ok()
}

/// Writes a message.
pub async fn write(output: &mut (impl AsyncWrite + Unpin), body: &[u8]) -> io::Result<()> {
    output.write_all(format!("Content-Length: {}\r\n\r\n", body.len()).as_bytes()).await?;
    output.write_all(body).await?;
    output.flush().await
}

#[cfg(test)]
mod tests {
    #![allow(clippy::unwrap_used)]
    use super::*;

    /// The frames of a stream, without its end.
    fn frames(stream: &[u8]) -> Vec<Frame> {
        let runtime = tokio::runtime::Builder::new_current_thread().build().unwrap();
        runtime.block_on(async {
            let mut reader = FrameReader::new(stream);
            let mut frames = Vec::new();
            loop {
                match reader.next().await {
                    Frame::End => return frames,
                    frame => frames.push(frame),
                }
            }
        })
    }

    fn message(text: &str) -> Frame {
        Frame::Message(text.as_bytes().to_vec())
    }

    #[test]
    fn messages_come_one_after_another() {
        let stream = b"Content-Length: 2\r\n\r\n{}content-length:3\nContent-Type: x; charset=utf-8\n\n[1]";
        assert_eq!(frames(stream), [message("{}"), message("[1]")]);
        assert_eq!(frames(b"Content-Length: 0\r\n\r\n"), [message("")]);
    }

    #[test]
    fn what_is_no_header_is_passed_over_and_told_of_once() {
        let stream = b"rubbish\r\nmore\r\n\r\n{\"a\":1}Content-Length: 2\r\n\r\n{}";
        assert_eq!(frames(stream), [Frame::Garbage, message("{}")]);
        let stream = b"Content-Length: many\r\n\r\nxContent-Length: 2\r\n\r\n{}";
        assert_eq!(frames(stream), [Frame::Garbage, message("{}")]);
        let long = [&vec![b'x'; 3 * LONGEST_LINE as usize][..], b"\nContent-Length: 2\r\n\r\n{}"].concat();
        assert_eq!(frames(&long), [Frame::Garbage, message("{}")]);
        assert_eq!(frames(b"rubbish"), []);
    }

    #[test]
    fn a_message_that_is_too_long_is_passed_over() {
        let length = LARGEST_MESSAGE + 1;
        let header = format!("Content-Length: {length}\r\n\r\n");
        let stream = [header.as_bytes(), &vec![b' '; length as usize][..], b"Content-Length: 2\r\n\r\n{}"].concat();
        assert_eq!(frames(&stream), [Frame::TooLarge(length), message("{}")]);
    }

    #[test]
    fn a_message_that_is_cut_off_is_none() {
        assert_eq!(frames(b"Content-Length: 20\r\n\r\n{}"), []);
        assert_eq!(frames(b"Content-Length: 20"), []);
    }
}
