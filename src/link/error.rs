//! What can be wrong with a message or its execution: the numbers and texts that SCPI-99 gives (volume 2, 21.8).
//!
//! Wordings and numbers are from memory of the standard.

/// Declares the errors once: name, number, text.
macro_rules! link_errors {
    ($($name:ident = $number:literal, $text:literal;)*) => {
        /// An error of the link, with the standard's number and text.
        ///
        /// Numbers -100 to -199 are command errors, -200 to -299 execution errors, -300 to -399 device-specific
        /// errors, -400 to -499 query errors.
        ///
        /// ```
        /// use evenbore::link::LinkError;
        /// assert_eq!(LinkError::UndefinedHeader.number(), -113);
        /// assert_eq!(LinkError::UndefinedHeader.text(), "Undefined header");
        /// assert_eq!(LinkError::DataOutOfRange.to_string(), "-222, Data out of range");
        /// ```
        #[derive(Debug, Clone, Copy, PartialEq, Eq)]
        #[cfg_attr(feature = "defmt", derive(defmt::Format))]
        #[non_exhaustive]
        pub enum LinkError {
            $(
                #[doc = concat!("`", $number, "`: ", $text, ".")]
                $name,
            )*
        }

        const ROWS: &[(i16, &str)] = &[$(($number, $text)),*];

        impl LinkError {
            /// Every error this link knows.
            pub const ALL: &[Self] = &[$(Self::$name),*];
        }
    };
}

link_errors! {
    CommandError = -100, "Command error";
    InvalidCharacter = -101, "Invalid character";
    SyntaxError = -102, "Syntax error";
    InvalidSeparator = -103, "Invalid separator";
    DataType = -104, "Data type error";
    ParameterNotAllowed = -108, "Parameter not allowed";
    MissingParameter = -109, "Missing parameter";
    HeaderSeparator = -111, "Header separator error";
    MnemonicTooLong = -112, "Program mnemonic too long";
    UndefinedHeader = -113, "Undefined header";
    HeaderSuffix = -114, "Header suffix out of range";
    InvalidCharacterInNumber = -121, "Invalid character in number";
    ExponentTooLarge = -123, "Exponent too large";
    TooManyDigits = -124, "Too many digits";
    InvalidSuffix = -131, "Invalid suffix";
    SuffixTooLong = -134, "Suffix too long";
    SuffixNotAllowed = -138, "Suffix not allowed";
    InvalidCharacterData = -141, "Invalid character data";
    CharacterDataTooLong = -144, "Character data too long";
    InvalidString = -151, "Invalid string data";
    InvalidBlock = -161, "Invalid block data";
    ExpressionNotAllowed = -178, "Expression data not allowed";
    ExecutionError = -200, "Execution error";
    CommandProtected = -203, "Command protected";
    SettingsConflict = -221, "Settings conflict";
    DataOutOfRange = -222, "Data out of range";
    TooMuchData = -223, "Too much data";
    IllegalParameter = -224, "Illegal parameter value";
    DataCorrupt = -230, "Data corrupt or stale";
    DataQuestionable = -231, "Data questionable";
    HardwareError = -240, "Hardware error";
    HardwareMissing = -241, "Hardware missing";
    DeviceSpecific = -300, "Device-specific error";
    SystemError = -310, "System error";
    MemoryError = -311, "Memory error";
    CalibrationLost = -313, "Calibration memory lost";
    ConfigurationLost = -315, "Configuration memory lost";
    StorageFault = -320, "Storage fault";
    SelfTestFailed = -330, "Self-test failed";
    CalibrationFailed = -340, "Calibration failed";
    QueueOverflow = -350, "Queue overflow";
    CommunicationError = -360, "Communication error";
    ParityError = -361, "Parity error in program message";
    FramingError = -362, "Framing error in program message";
    InputOverrun = -363, "Input buffer overrun";
    TimeOut = -365, "Time out error";
    QueryInterrupted = -410, "Query INTERRUPTED";
    QueryUnterminated = -420, "Query UNTERMINATED";
    QueryDeadlocked = -430, "Query DEADLOCKED";
    QueryAfterIndefinite = -440, "Query UNTERMINATED after indefinite response";
}

impl LinkError {
    /// The standard's number.
    pub fn number(self) -> i16 {
        self.row().0
    }

    /// The standard's text.
    pub fn text(self) -> &'static str {
        self.row().1
    }

    /// Whether the message itself was wrong, so that the rest of it cannot be trusted.
    pub fn is_command_error(self) -> bool {
        (-199..=-100).contains(&self.number())
    }

    fn row(self) -> (i16, &'static str) {
        ROWS.get(self as usize).copied().unwrap_or((-300, "Device-specific error"))
    }
}

impl core::fmt::Display for LinkError {
    fn fmt(&self, f: &mut core::fmt::Formatter<'_>) -> core::fmt::Result {
        write!(f, "{}, {}", self.number(), self.text())
    }
}

impl core::error::Error for LinkError {}
