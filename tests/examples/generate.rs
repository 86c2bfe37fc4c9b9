//! Writes a generated document of so many bytes to standard output: `generate SEED BYTES`.

fn main() {
    let mut arguments = std::env::args().skip(1).filter_map(|argument| argument.parse::<u64>().ok());
    let (seed, bytes) = (arguments.next().unwrap_or(1), arguments.next().unwrap_or(1_000_000));
    let bytes = usize::try_from(bytes).unwrap_or(1_000_000);
    #[allow(clippy::print_stdout)]
    {
        print!("{}", indexwise_tests::generate::document(seed, bytes));
    }
}
