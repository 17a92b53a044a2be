//! Ordinary given and family names of several languages, combined by chance: nobody in particular.

use super::random::Random;

/// The names of one home language, in its own script.
struct Names {
    weight: usize,
    language: &'static str,
    families: &'static [&'static str],
    girls: &'static [&'static str],
    boys: &'static [&'static str],
}

/// A name with the language spoken at home.
pub struct Name {
    /// Given name.
    pub given: String,
    /// Family name.
    pub family: String,
    /// `F` or `M`.
    pub sex: &'static str,
    /// Home language.
    pub language: &'static str,
}

/// Returns a name; `girl` decides which given names are drawn from.
pub fn name(random: &mut Random) -> Name {
    let names = &NAMES[random.weighted(NAMES.iter().map(|n| n.weight))];
    let girl = random.percent(50);
    let given = random.word(if girl { names.girls } else { names.boys });
    let mut family = random.word(names.families).to_owned();
    if names.language == "Spanish" && random.percent(40) {
        let second = random.word(names.families);
        family = format!("{family} {second}");
    }
    Name {
        given: given.to_owned(),
        family,
        sex: if girl { "F" } else { "M" },
        language: names.language,
    }
}

/// Returns another given name of the same language and sex, for a sibling.
pub fn another_given(of: &Name, random: &mut Random) -> String {
    let Some(names) = NAMES.iter().find(|n| n.language == of.language) else {
        return of.given.clone();
    };
    let list = if of.sex == "F" {
        names.girls
    } else {
        names.boys
    };
    let start = random.below(list.len());
    let others = list.iter().cycle().skip(start).take(list.len());
    others
        .copied()
        .find(|given| *given != of.given)
        .unwrap_or("")
        .to_owned()
}

/// Returns an adult's given name of the same language.
pub fn adult_given(language: &str, random: &mut Random) -> &'static str {
    let names = NAMES
        .iter()
        .find(|n| n.language == language)
        .unwrap_or(&NAMES[0]);
    let girl = random.percent(60);
    random.word(if girl { names.girls } else { names.boys })
}

const NAMES: [Names; 15] = [
    Names {
        weight: 44,
        language: "English",
        families: &[
            "Abbot",
            "Ashdown",
            "Barlow",
            "Bexley",
            "Calder",
            "Corbin",
            "Dunmore",
            "Ellery",
            "Fenwick",
            "Garrick",
            "Hadley",
            "Ives",
            "Jessop",
            "Kettering",
            "Langford",
            "Marlow",
            "Norwood",
            "Oakes",
            "Pemberton",
            "Quick",
            "Radley",
            "Selby",
            "Thorne",
            "Underhill",
            "Vance",
            "Whitlock",
            "Yardley",
            "O'Dea",
            "McArdle",
            "Stone-Field",
        ],
        girls: &[
            "Ada", "Bethany", "Clara", "Daisy", "Eleanor", "Fern", "Grace", "Hazel", "Iris",
            "June", "Keziah", "Lucy", "Mabel", "Nora", "Opal", "Poppy", "Ruth", "Sadie", "Tamsin",
            "Willa",
        ],
        boys: &[
            "Alfie", "Benjamin", "Caleb", "Dylan", "Elijah", "Finn", "George", "Harvey", "Isaac",
            "Jonah", "Kit", "Leo", "Micah", "Noah", "Oscar", "Percy", "Reuben", "Silas", "Toby",
            "Wesley",
        ],
    },
    Names {
        weight: 18,
        language: "Spanish",
        families: &[
            "García",
            "Muñoz",
            "Peña",
            "Ibáñez",
            "Núñez",
            "Ramírez",
            "Ordóñez",
            "Vásquez",
            "Quiñones",
            "Ávila",
            "Solís",
            "Cárdenas",
        ],
        girls: &[
            "Lucía", "Inés", "Begoña", "Sofía", "Itzel", "Ximena", "Belén", "Nayeli",
        ],
        boys: &[
            "Andrés", "Íñigo", "Joaquín", "Mateo", "Ramón", "Tomás", "Óscar", "Nicolás",
        ],
    },
    Names {
        weight: 8,
        language: "Vietnamese",
        families: &["Nguyễn", "Đặng", "Trần", "Phạm", "Võ", "Huỳnh", "Lê", "Bùi"],
        girls: &[
            "Hạnh",
            "Thị Mỹ Duyên",
            "Ngọc Ánh",
            "Thảo",
            "Bích Liên",
            "Quỳnh",
        ],
        boys: &["Đức", "Minh Khôi", "Tuấn", "Quốc Bảo", "Hiếu", "Phước"],
    },
    Names {
        weight: 5,
        language: "Arabic",
        families: &["الخطيب", "حداد", "النجار", "منصور", "الصباغ", "زيدان"],
        girls: &["ليلى", "مريم", "نور", "سلمى", "هبة"],
        boys: &["يوسف", "كريم", "طارق", "سامي", "عمر"],
    },
    Names {
        weight: 5,
        language: "Chinese",
        families: &["王", "李", "张", "陳", "赵", "歐陽"],
        girls: &["小雨", "佳怡", "思涵", "美玲", "雪"],
        boys: &["子轩", "浩然", "志強", "明", "宇航"],
    },
    Names {
        weight: 3,
        language: "Korean",
        families: &["김", "이", "박", "최", "정"],
        girls: &["서연", "하은", "지우", "수아"],
        boys: &["민준", "도윤", "시우", "현우"],
    },
    Names {
        weight: 3,
        language: "Ukrainian",
        families: &["Шевчук", "Бондаренко", "Ткаченко", "Кравець", "Гнатюк"],
        girls: &["Олена", "Соломія", "Ганна", "Їванна"],
        boys: &["Андрій", "Богдан", "Тарас", "Юрій"],
    },
    Names {
        weight: 2,
        language: "Greek",
        families: &["Αγγελίδης", "Βλάχος", "Καραγιάννης", "Μαυρίδης"],
        girls: &["Ελένη", "Δάφνη", "Ιωάννα", "Χρυσούλα"],
        boys: &["Νίκος", "Γιώργος", "Στέφανος", "Λεωνίδας"],
    },
    Names {
        weight: 3,
        language: "Hindi",
        families: &[
            "शर्मा",
            "वर्मा",
            "जोशी",
            "त्रिपाठी",
            "मिश्रा",
            "राठौर",
            "कुलकर्णी",
        ],
        girls: &["अनन्या", "दीपिका", "मीरा", "ज्योति", "सृष्टि", "तारा"],
        boys: &["आरव", "विवान", "कृष्ण", "सिद्धार्थ", "ईशान", "मोहित"],
    },
    Names {
        weight: 3,
        language: "Polish",
        families: &["Wróbel", "Świątek", "Gołąb", "Żuraw", "Dąbek"],
        girls: &["Zofia", "Małgorzata", "Bożena", "Łucja"],
        boys: &["Łukasz", "Grzegorz", "Jędrzej", "Stanisław"],
    },
    Names {
        weight: 2,
        language: "Haitian Creole",
        families: &["Désir", "Jean-Noël", "Étienne", "Célestin"],
        girls: &["Mirlande", "Rose-Thérèse", "Fabiola", "Widelène"],
        boys: &["Jean-Frantz", "Évens", "Kerby", "Frédo"],
    },
    Names {
        weight: 2,
        language: "Turkish",
        families: &["Işık", "Çelik", "Şahin", "Güneş"],
        girls: &["Ayşe", "İnci", "Zeynep", "Gülşen"],
        boys: &["Çağrı", "Ömer", "Barış", "İsmail"],
    },
    Names {
        weight: 2,
        language: "Somali",
        families: &["Warsame", "Jimcaale", "Cabdi", "Guuleed"],
        girls: &["Hodan", "Ifrah", "Sagal", "Ubax"],
        boys: &["Cali", "Liban", "Saciid", "Xirsi"],
    },
    Names {
        weight: 1,
        language: "Japanese",
        families: &["佐藤", "ヤマダ", "小林"],
        girls: &["さくら", "結衣", "ハナ"],
        boys: &["陽翔", "けんた", "大和"],
    },
    Names {
        weight: 1,
        language: "Swedish",
        families: &["Åkesson", "Sjöberg", "Ängström"],
        girls: &["Märta", "Åsa", "Ebba"],
        boys: &["Björn", "Håkan", "Östen"],
    },
];
