//! Lines that fit: words kept whole where they can be, columns counted as a terminal shows them.

use unicode_width::{UnicodeWidthChar, UnicodeWidthStr};

use super::markup::{Piece, Text};

/// Columns of a text.
pub fn width_of(text: &Text) -> usize {
    text.0.iter().map(|piece| piece.text.width()).sum()
}

/// A blank at which no line is broken; it is shown as a blank.
pub const FIRM: char = '\u{a0}';

/// The text with blanks up to a width.
pub fn pad(mut text: Text, width: usize) -> Text {
    text.push(
        Default::default(),
        " ".repeat(width.saturating_sub(width_of(&text))),
    );
    text
}

/// What stands in a margin: blanks up to the text, at least one.
pub fn margin(lead: Text, width: usize) -> Text {
    let least = if lead.is_empty() {
        0
    } else {
        width_of(&lead) + 1
    };
    pad(lead, width.max(least))
}

/// A word: pieces that no blank parts, and whether a blank stood before it.
struct Word {
    pieces: Vec<Piece>,
    width: usize,
}

fn words(text: &Text) -> Vec<Word> {
    let mut all: Vec<Word> = Vec::new();
    let mut glued = false;
    for piece in &text.0 {
        for (at, part) in piece.text.split(' ').enumerate() {
            if at > 0 {
                glued = false;
            }
            if part.is_empty() {
                continue;
            }
            let own = Piece {
                text: part.to_owned(),
                meaning: piece.meaning,
            };
            match all.last_mut().filter(|_| glued) {
                Some(word) => {
                    word.width += part.width();
                    word.pieces.push(own);
                }
                None => all.push(Word {
                    width: part.width(),
                    pieces: vec![own],
                }),
            }
            glued = true;
        }
    }
    all
}

/// Cuts a word that no line holds.
fn cut(word: Word, room: usize) -> Vec<Word> {
    if word.width <= room {
        return vec![word];
    }
    let mut parts = vec![Word {
        pieces: Vec::new(),
        width: 0,
    }];
    for piece in word.pieces {
        for c in piece.text.chars() {
            let wide = c.width().unwrap_or(0);
            if parts
                .last()
                .is_some_and(|part| part.width + wide > room && part.width > 0)
            {
                parts.push(Word {
                    pieces: Vec::new(),
                    width: 0,
                });
            }
            if let Some(part) = parts.last_mut() {
                part.width += wide;
                match part
                    .pieces
                    .last_mut()
                    .filter(|p| p.meaning == piece.meaning)
                {
                    Some(last) => last.text.push(c),
                    None => part.pieces.push(Piece {
                        text: c.to_string(),
                        meaning: piece.meaning,
                    }),
                }
            }
        }
    }
    parts
}

/// Lines of at most `room` columns, at least one.
pub fn wrap(text: &Text, room: usize) -> Vec<Text> {
    let room = room.max(1);
    let mut lines = vec![Text::new()];
    let mut used = 0;
    for word in words(text).into_iter().flat_map(|word| cut(word, room)) {
        if used > 0 && used + 1 + word.width > room {
            lines.push(Text::new());
            used = 0;
        }
        let Some(line) = lines.last_mut() else { break };
        if used > 0 {
            // A blank belongs to the piece before it, so that underlining does not run on.
            match line.0.last_mut() {
                Some(last) if last.meaning == Default::default() => last.text.push(' '),
                _ => line.push(Default::default(), " "),
            }
            used += 1;
        }
        used += word.width;
        for piece in word.pieces {
            match line
                .0
                .last_mut()
                .filter(|last| last.meaning == piece.meaning)
            {
                Some(last) => last.text.push_str(&piece.text),
                None => line.0.push(piece),
            }
        }
    }
    lines
}

#[cfg(test)]
mod tests {
    use super::super::markup::Meaning;
    use super::*;

    fn lines(text: &str, room: usize) -> Vec<String> {
        wrap(&Text::from(text), room)
            .iter()
            .map(Text::bare)
            .collect()
    }

    #[test]
    fn words_stay_whole_and_a_longer_one_is_cut() {
        assert_eq!(
            lines("earth bar to a stake", 9),
            ["earth bar", "to a", "stake"]
        );
        assert_eq!(lines("abcdefgh ij", 3), ["abc", "def", "gh", "ij"]);
        assert_eq!(lines("", 10), [""]);
    }

    #[test]
    fn columns_are_counted_as_shown() {
        assert_eq!(lines("0.35 MΩ 漢字", 9), ["0.35 MΩ", "漢字"]);
        assert_eq!(width_of(&Text::from("漢字 Ω")), 6);
    }

    #[test]
    fn a_word_of_several_meanings_is_not_parted() {
        let text = Text::new()
            .plain("read (")
            .with(Meaning::Value, "47 V")
            .plain("), then");
        let shown: Vec<String> = wrap(&text, 9).iter().map(Text::bare).collect();
        assert_eq!(shown, ["read (47", "V), then"]);
    }
}
