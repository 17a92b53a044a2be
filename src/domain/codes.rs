//! The code lists of the results file, the store and the screens: one word, one title.

/// Declares an enum whose variants each have a file word and a title for people.
macro_rules! code_list {
    ($(#[$doc:meta])* $name:ident { $($(#[$vdoc:meta])* $variant:ident = $word:literal, $title:literal;)+ }) => {
        $(#[$doc])*
        #[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
        pub enum $name { $(#[doc = $title] $(#[$vdoc])* $variant,)+ }

        impl $name {
            /// Every value, in the order of the list.
            pub const ALL: &'static [$name] = &[$($name::$variant,)+];

            /// Returns the value of a file word.
            pub fn from_word(word: &str) -> Option<Self> {
                match word { $($word => Some($name::$variant),)+ _ => None }
            }

            /// Returns the word used in files.
            pub fn word(self) -> &'static str {
                match self { $($name::$variant => $word,)+ }
            }

            /// Returns the words for people.
            pub fn title(self) -> &'static str {
                match self { $($name::$variant => $title,)+ }
            }

            /// Returns all file words, separated by commas, for messages.
            pub fn words() -> String {
                Self::ALL.iter().map(|v| v.word()).collect::<Vec<_>>().join(", ")
            }
        }
    };
}
pub(crate) use code_list;

code_list! {
    /// Which try of the term this visit is.
    Attempt {
        First = "first", "first visit";
        Rescreen = "rescreen", "rescreen";
    }
}

code_list! {
    /// Whether and how the child took part.
    Status {
        Present = "present", "present";
        Absent = "absent", "absent";
        OptedOut = "opted_out", "opted out";
        NotAttempted = "not_attempted", "not attempted";
        LeftEarly = "left_early", "left early";
        UnderCare = "under_care", "under care";
    }
}

code_list! {
    /// How far the chart was read.
    AcuityMethod {
        Threshold = "threshold", "smallest line read";
        CriticalLine = "critical_line", "critical line only";
    }
}

code_list! {
    /// Glasses or contact lenses during the acuity test.
    Correction {
        None = "none", "owns no glasses";
        Worn = "yes", "glasses worn";
        ContactLenses = "contact_lenses", "contact lenses worn";
        NotWorn = "no", "glasses owned, not worn";
        LeftAtHome = "left_at_home", "glasses left at home";
        BrokenOrLost = "broken_or_lost", "glasses broken or lost";
    }
}

code_list! {
    /// The plus lens test: reading the line through it is the finding.
    PlusLens {
        Read = "read", "line read through the lens";
        Blurred = "blurred", "blurred by the lens";
    }
}

code_list! {
    /// The cover test.
    Cover {
        None = "none", "no movement";
        Phoria = "phoria", "phoria only";
        Intermittent = "intermittent", "intermittent strabismus";
        Constant = "constant", "constant strabismus";
    }
}

code_list! {
    /// Which eye deviates.
    DeviatingEye {
        Right = "right", "right eye";
        Left = "left", "left eye";
        Alternating = "alternating", "alternating";
    }
}

code_list! {
    /// Where the eye turns.
    Direction {
        In = "in", "inward";
        Out = "out", "outward";
        Up = "up", "upward";
        Down = "down", "downward";
    }
}

code_list! {
    /// The red reflex of one eye.
    Reflex {
        Normal = "normal", "normal";
        Absent = "absent", "absent";
        White = "white", "white";
        Dull = "dull", "dull";
        DarkSpot = "dark_spot", "dark spot";
        Unequal = "unequal", "unequal";
    }
}

code_list! {
    /// Whether the instrument gave a reading for an eye.
    InstrumentResult {
        Ok = "ok", "reading";
        NoReading = "no_reading", "no reading";
    }
}

code_list! {
    /// Yes or no.
    YesNo {
        Yes = "yes", "yes";
        No = "no", "no";
    }
}

code_list! {
    /// Consent of the guardian.
    Consent {
        Yes = "yes", "consent given";
        No = "no", "no consent";
        Unknown = "unknown", "consent unknown";
    }
}

code_list! {
    /// What is known from the family or a teacher.
    History {
        VisibleAbnormality = "visible_abnormality", "visible abnormality of the eye or lids";
        Neurodevelopmental = "neurodevelopmental", "neurodevelopmental disorder";
        SystemicCondition = "systemic_condition", "systemic condition with eye findings";
        DownSyndrome = "down_syndrome", "Down syndrome";
        FamilyStrabismus = "family_strabismus", "parent or sibling with strabismus";
        FamilyAmblyopia = "family_amblyopia", "parent or sibling with amblyopia";
        PretermUnder32Weeks = "preterm_under_32_weeks", "born before 32 completed weeks";
        ParentRefractiveError = "parent_refractive_error", "parent with refractive error";
        ParentConcern = "parent_concern", "parent believes there is a problem";
        TeacherConcern = "teacher_concern", "teacher's concern";
        BlurredVision = "blurred_vision", "blurred vision";
        Squinting = "squinting", "squinting";
        Headaches = "headaches", "headaches";
        TiredByCloseWork = "tired_by_close_work", "tired by close work";
        Examined12Months = "examined_12_months", "examined in the last 12 months";
        UnderCare = "under_care", "under care";
    }
}

code_list! {
    /// A sign somebody saw or was told of.
    SignKind {
        NewSquint = "new_squint", "new squint";
        KnownSquint = "known_squint", "known squint";
        LostRedReflex = "lost_red_reflex", "lost red reflex";
        WhitePupil = "white_pupil", "white pupil";
        SuddenVisionLoss = "sudden_vision_loss", "sudden loss of vision";
        SuddenDiplopia = "sudden_diplopia", "sudden double vision";
        EyeInjury = "eye_injury", "eye injury";
        ChemicalInjury = "chemical_injury", "chemical in the eye";
        OrbitalCellulitis = "orbital_cellulitis", "swollen lids with fever (orbital cellulitis)";
        AtaxiaVomitingHeadache = "ataxia_vomiting_headache", "ataxia, vomiting or headache";
        LimitedAbduction = "limited_abduction", "limited eye movement outward";
        Nystagmus = "nystagmus", "nystagmus";
        FaceTurn = "face_turn", "face turn";
        HeadTilt = "head_tilt", "head tilt";
        LargeOrCloudyEye = "large_or_cloudy_eye", "large or cloudy eye";
        LightAvoidance = "light_avoidance", "light avoidance";
        UnequalPupils = "unequal_pupils", "unequal pupils";
        NoVisualResponse = "no_visual_response", "no visual response";
    }
}

code_list! {
    /// Which eye a sign was seen in.
    Side {
        Right = "right", "right eye";
        Left = "left", "left eye";
        Both = "both", "both eyes";
    }
}
