# English. One message a line; { $name } is filled in. A line that begins with a number sign is a remark.
language-name = English
direction = ltr
draft = Draft: have a speaker check

# Dates
month-1 = January
month-2 = February
month-3 = March
month-4 = April
month-5 = May
month-6 = June
month-7 = July
month-8 = August
month-9 = September
month-10 = October
month-11 = November
month-12 = December
date = { $day } { $month } { $year }

# Every letter
greeting = To the parent or guardian of { $child }
child-line = { $child }, born { $born }, { $class }
child-line-unborn = { $child }, { $class }
tested = On { $date } we tested the eyesight of { $child } at { $site }.
not-an-exam = This was a screening, not an eye examination. A child can pass a screening and still have an eye problem. If you are worried, ask an eye doctor.
urgent-signs = If an eye looks white in photos, suddenly turns, hurts, was injured, or sight is suddenly worse: get help today. Do not wait for a letter.
questions = Questions? { $who }, { $phone }
questions-no-phone = Questions? Ask { $who }.
local-rules = Local rules and your eye doctor's advice come first.

# What was found
found-heading = What we tested
test = Test
right-eye = Right eye
left-eye = Left eye
both-eyes = Both eyes
test-distance = Reading a chart from a distance
test-near = Reading close up
test-plus = Reading through a lens
test-stereo = Using both eyes together
test-cover = Watching whether an eye turns
test-reflex = Light shone into the eye
test-color = Telling colors apart
test-instrument = Measured with an instrument
not-done = not tested
not-testable = could not be tested
value-fine = no concern
value-look = an eye doctor should look
what-it-means = What this means
glasses-worn = { $child } wore glasses during the test.
contacts-worn = { $child } wore contact lenses during the test.
glasses-none = { $child } did not wear glasses during the test and owns none.
glasses-not-worn = { $child } owns glasses and did not wear them during the test.
glasses-unknown = We did not note whether glasses were worn.

# Referral
title-referral = Your child needs an eye examination
result-referral = { $child } did not pass. { $child } needs a full examination by an eye doctor.
result-history = We tested { $child }. Because of what is known of { $child }'s health or family, we advise a full examination by an eye doctor, whatever the chart says.
result-untested = We could not test { $child } well. { $child } needs a full examination by an eye doctor.
why-heading = Why it matters
why = Many children who do not see well with one eye do not notice it. Found early, most of these problems can be treated. Found late, sight can be lost for good.
what-to-do = What to do
step-book = Call an eye doctor who sees children. Say: “My child needs an eye examination after a vision screening at school.”
step-bring = Take this letter and the report form with you.
step-return = Ask the doctor to fill in the form. Give it back to the school.
act-by = Please go by { $date }.
cost-help = Help with the cost: { $help }
interpreter = You can ask for an interpreter. It costs you nothing.

# Urgent
title-urgent = Your child needs an eye doctor soon
result-urgent = We saw something in { $child } that an eye doctor should look at soon.
title-emergency = Your child needs help today
result-emergency = We saw something in { $child } that has to be looked at today.
step-now = Go to an emergency department or an eye emergency clinic now. Take this letter with you.
call-record = We spoke with { $whom } on { $date }.
call-none = We have not reached you by telephone.

# Rescreen
title-rescreen = We will test your child's eyesight again
result-rescreen = { $child } needs to be tested a second time. This is common: a child may be tired or may not understand. We will test again by { $date }. You do not need to do anything now.
result-rescreen-undated = { $child } needs to be tested a second time. This is common: a child may be tired or may not understand. We will test again. You do not need to do anything now.

# Glasses at home
title-glasses = Please send your child's glasses to school
result-glasses = { $child } owns glasses and did not have them on the day of the test. Please send them to school every day. We will test again by { $date }.
result-glasses-undated = { $child } owns glasses and did not have them on the day of the test. Please send them to school every day. We will test again.
glasses-lost = If the glasses are lost, broken or too old, please tell us.

# Second notice
title-second = We wrote to you before: your child needs an eye examination
result-second = On { $date } we wrote that { $child } needs an eye examination. We do not know yet whether it has taken place.
result-second-undated = We wrote that { $child } needs an eye examination. We do not know yet whether it has taken place.

# Passed
title-passed = Your child passed the vision screening
result-passed = { $child } passed.

# Color
title-color = About colors
result-color = { $child } had difficulty in telling some colors apart. This is common and needs no treatment. Tell the teacher, so that colors are also named in words.

# To the child's doctor
title-doctor = Result of a vision screening
greeting-doctor = To { $doctor }
result-doctor = { $child } was screened on { $date } at { $site }. Outcome: { $outcome }.
doctor-ask = Please let us know if { $child } is already under care.

# Answer slip
answer-heading = Please cut off and give back to the school
answer-examined = My child has already been examined. Date: ____________  By: ______________________
answer-declined = We decline an examination.
answer-call = Please call me. Best time: ____________
answer-sign = Signature: ______________________________  Date: ____________
code-line = Code { $code }

# Report form
title-form = Report of an eye examination
form-intro = For the examiner: please fill in and give back, or call { $phone } and say the code.
form-intro-no-phone = For the examiner: please fill in and give back to the school.
form-date = Date of the examination
form-examiner = Examiner, telephone
form-without = Acuity without glasses
form-with = Acuity with the glasses worn
form-refraction = Refraction (sphere, cylinder, axis)
form-how = Found by: ☐ retinoscopy ☐ autorefraction ☐ subjective. Cycloplegia: ☐ none ☐ with ____________
form-best = Best-corrected acuity
form-cover = Cover test: ☐ no movement ☐ phoria ☐ intermittent ☐ constant, eye ______ direction ______ prism dioptres ____
form-stereo = Stereo, seconds of arc: ______
form-fundus = Fundus seen, normal / abnormal
form-amblyopia = Amblyopia: none / suspect / present
form-normal = ☐ No abnormality
form-findings = Findings (ICD-10-CM)
form-treatment = Treatment: ☐ none ☐ glasses ☐ contact lenses ☐ patching ☐ drops ☐ surgery advised ☐ observation ☐ referred onward
form-wear = Glasses worn: ☐ all the time ☐ distance ☐ near ☐ in the classroom
form-prescription = Prescription (sphere, cylinder, axis)
form-return = Next visit
form-classroom = Advice for the classroom
form-consent = ☐ The family agrees that this report goes to the school.
form-sign = Signature of the examiner
