//! Reading that ends when the run is asked to stop.

use std::io::{self, Read};
use std::sync::mpsc::{self, Receiver, RecvTimeoutError};
use std::thread;
use std::time::Duration;

use crate::run::StopFlag;

/// Bytes read at a time.
const CHUNK: usize = 1 << 16;
/// Chunks that may wait to be taken.
const WAITING: usize = 4;
/// How often the flag is looked at while nothing comes.
const GLANCE: Duration = Duration::from_millis(50);

/// A reader whose source may keep silent for ever: a pipe that stays open.
///
/// The source is read on a thread of its own; whoever waits for its bytes gets
/// an error as soon as the stop flag is raised. Bytes that came before are
/// handed on first.
pub struct StoppableReader {
    chunks: Receiver<io::Result<Vec<u8>>>,
    chunk: Vec<u8>,
    taken: usize,
    stop: StopFlag,
}

impl StoppableReader {
    /// Starts to read a source. The thread ends with the source, or when the
    /// reader is gone and the source says something.
    pub fn new(mut source: impl Read + Send + 'static, stop: StopFlag) -> Self {
        let (sender, chunks) = mpsc::sync_channel(WAITING);
        thread::spawn(move || {
            loop {
                let mut chunk = vec![0; CHUNK];
                let read = match source.read(&mut chunk) {
                    Err(error) if error.kind() == io::ErrorKind::Interrupted => continue,
                    read => read,
                };
                let goes_on = matches!(read, Ok(bytes) if bytes > 0);
                let sent = sender.send(read.map(|bytes| {
                    chunk.truncate(bytes);
                    chunk
                }));
                if sent.is_err() || !goes_on {
                    break;
                }
            }
        });
        Self {
            chunks,
            chunk: Vec::new(),
            taken: 0,
            stop,
        }
    }
}

impl Read for StoppableReader {
    fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
        while self.taken == self.chunk.len() {
            match self.chunks.recv_timeout(GLANCE) {
                Ok(chunk) => {
                    self.chunk = chunk?;
                    self.taken = 0;
                    if self.chunk.is_empty() {
                        return Ok(0);
                    }
                }
                Err(RecvTimeoutError::Timeout) if self.stop.is_raised() => {
                    return Err(io::Error::other("the run was asked to stop"));
                }
                Err(RecvTimeoutError::Timeout) => {}
                Err(RecvTimeoutError::Disconnected) => return Ok(0),
            }
        }
        let rest = &self.chunk[self.taken..];
        let count = rest.len().min(buffer.len());
        buffer[..count].copy_from_slice(&rest[..count]);
        self.taken += count;
        Ok(count)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Says one thing, then nothing, without ending.
    struct Silent(Option<&'static [u8]>);

    impl Read for Silent {
        fn read(&mut self, buffer: &mut [u8]) -> io::Result<usize> {
            match self.0.take() {
                Some(text) => {
                    buffer[..text.len()].copy_from_slice(text);
                    Ok(text.len())
                }
                None => loop {
                    thread::park();
                },
            }
        }
    }

    #[test]
    fn a_silent_source_is_left_when_the_flag_is_raised() {
        let stop = StopFlag::new();
        let mut reader = StoppableReader::new(Silent(Some(b"CCO")), stop.clone());
        let mut two = [0; 2];
        reader.read_exact(&mut two).unwrap();
        assert_eq!(&two, b"CC");
        stop.raise();
        assert_eq!(reader.read(&mut two).unwrap(), 1);
        assert!(reader.read(&mut two).is_err());
    }

    #[test]
    fn all_of_a_source_that_ends_is_read() {
        let text = "CCO\n".repeat(100_000);
        let source = io::Cursor::new(text.clone().into_bytes());
        let mut read = String::new();
        StoppableReader::new(source, StopFlag::new())
            .read_to_string(&mut read)
            .unwrap();
        assert_eq!(read, text);
    }
}
