//! The accepted word nearest to a misspelt one.

/// Words longer than this are not compared, in bytes: nobody mistypes that much.
const LONGEST_WORD: usize = 64;
/// In words shorter than this a slip makes another word, such as another pressure unit.
const FEWEST_LETTERS: usize = 4;

/// Finds the accepted word that was probably meant.
///
/// Differences of case and punctuation are looked through first, then a missing end; then one slip in three letters is
/// forgiven in words long enough.
///
/// * `wrong`: the word as found
/// * `accepted`: the words that would have been right
///
/// ```
/// use evenbore_bench::input::nearest::nearest;
/// assert_eq!(nearest("Bore-mm", &["bore_mm", "gap_mm"]), Some("bore_mm"));
/// assert_eq!(nearest("helim", &["helium", "argon"]), Some("helium"));
/// assert_eq!(nearest("oil", &["helium", "argon"]), None);
/// ```
pub fn nearest<'a>(wrong: &str, accepted: &[&'a str]) -> Option<&'a str> {
    if wrong.len() > LONGEST_WORD {
        return None;
    }
    same_letters(wrong, accepted).or_else(|| cut_short(wrong, accepted)).or_else(|| few_slips(wrong, accepted))
}

/// Finds the accepted word that differs in case and punctuation only.
///
/// * `wrong`: the word as found
/// * `accepted`: the words that would have been right
pub fn same_letters<'a>(wrong: &str, accepted: &[&'a str]) -> Option<&'a str> {
    let wanted = letters(wrong);
    accepted.iter().copied().find(|word| letters(word) == wanted)
}

/// Says which word was probably meant, or nothing.
///
/// * `wrong`: the word as found
/// * `accepted`: the words that would have been right
pub fn did_you_mean(wrong: &str, accepted: &[&str]) -> String {
    nearest(wrong, accepted).map_or_else(String::new, |word| format!("; did you mean {word}?"))
}

/// Lower-case letters and digits of a word.
pub fn letters(word: &str) -> String {
    word.chars().filter(|c| c.is_alphanumeric()).flat_map(char::to_lowercase).collect()
}

/// Finds the only accepted word that goes on where a wrong one ends.
fn cut_short<'a>(wrong: &str, accepted: &[&'a str]) -> Option<&'a str> {
    let start = letters(wrong);
    let mut longer = accepted.iter().copied().filter(|word| letters(word).starts_with(&start));
    let only = longer.next().filter(|_| longer.next().is_none());
    only.filter(|_| start.len() >= FEWEST_LETTERS)
}

/// Finds the accepted word within one slip for every three letters.
fn few_slips<'a>(wrong: &str, accepted: &[&'a str]) -> Option<&'a str> {
    let wanted: Vec<char> = letters(wrong).chars().collect();
    let slips = |word: &&str| distance(&wanted, &letters(word).chars().collect::<Vec<_>>());
    let best = accepted.iter().copied().min_by_key(slips)?;
    (wanted.len() >= FEWEST_LETTERS && slips(&best) <= wanted.len() / 3).then_some(best)
}

/// Counts the letters to insert, remove or replace to turn one word into the other.
fn distance(from: &[char], to: &[char]) -> usize {
    let mut row: Vec<usize> = (0..=to.len()).collect();
    for (i, a) in from.iter().enumerate() {
        let mut diagonal = row[0];
        row[0] = i + 1;
        for (j, b) in to.iter().enumerate() {
            let replaced = diagonal + usize::from(a != b);
            diagonal = row[j + 1];
            row[j + 1] = replaced.min(diagonal + 1).min(row[j] + 1);
        }
    }
    row[to.len()]
}
