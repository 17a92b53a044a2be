# Tiếng Việt.
language-name = Tiếng Việt
direction = ltr
draft = Bản nháp: cần người nói tiếng này kiểm tra

month-1 = tháng 1
month-2 = tháng 2
month-3 = tháng 3
month-4 = tháng 4
month-5 = tháng 5
month-6 = tháng 6
month-7 = tháng 7
month-8 = tháng 8
month-9 = tháng 9
month-10 = tháng 10
month-11 = tháng 11
month-12 = tháng 12
date = ngày { $day } { $month } năm { $year }

greeting = Kính gửi phụ huynh hoặc người giám hộ của { $child }
child-line = { $child }, sinh { $born }, { $class }
child-line-unborn = { $child }, { $class }
tested = Vào { $date }, chúng tôi đã kiểm tra thị lực của { $child } tại { $site }.
not-an-exam = Đây là kiểm tra sàng lọc, không phải khám mắt. Một em có thể đạt khi sàng lọc mà vẫn có bệnh về mắt. Nếu quý vị lo lắng, xin hỏi bác sĩ mắt.
urgent-signs = Nếu mắt có màu trắng trong ảnh, đột nhiên bị lác, đau, bị thương, hoặc nhìn đột nhiên kém đi: hãy đi khám ngay hôm nay. Đừng chờ thư.
questions = Có câu hỏi? { $who }, { $phone }
questions-no-phone = Có câu hỏi? Xin hỏi { $who }.
local-rules = Quy định địa phương và lời khuyên của bác sĩ mắt được ưu tiên.

found-heading = Những gì chúng tôi đã kiểm tra
test = Kiểm tra
right-eye = Mắt phải
left-eye = Mắt trái
both-eyes = Cả hai mắt
test-distance = Đọc bảng chữ từ xa
test-near = Đọc gần
test-plus = Đọc qua thấu kính
test-stereo = Dùng hai mắt cùng lúc
test-cover = Xem mắt có bị lác không
test-reflex = Chiếu ánh sáng vào mắt
test-color = Phân biệt màu sắc
test-instrument = Đo bằng máy
not-done = không kiểm tra
not-testable = không kiểm tra được
value-fine = không có vấn đề
value-look = bác sĩ mắt nên xem
what-it-means = Điều này có nghĩa là gì
glasses-worn = { $child } có đeo kính khi kiểm tra.
contacts-worn = { $child } có đeo kính áp tròng khi kiểm tra.
glasses-none = { $child } không đeo kính khi kiểm tra và không có kính.
glasses-not-worn = { $child } có kính nhưng không đeo khi kiểm tra.
glasses-unknown = Chúng tôi không ghi lại em có đeo kính hay không.

title-referral = Con của quý vị cần được khám mắt
result-referral = { $child } không đạt. { $child } cần được bác sĩ mắt khám đầy đủ.
result-history = Chúng tôi đã kiểm tra { $child }. Vì những gì đã biết về sức khỏe hoặc gia đình của { $child }, chúng tôi khuyên nên khám đầy đủ với bác sĩ mắt, dù kết quả bảng chữ thế nào.
result-untested = Chúng tôi không kiểm tra được { $child } đầy đủ. { $child } cần được bác sĩ mắt khám đầy đủ.
why-heading = Vì sao điều này quan trọng
why = Nhiều em nhìn kém một mắt mà không biết. Nếu phát hiện sớm, phần lớn có thể chữa được. Nếu phát hiện muộn, có thể mất thị lực vĩnh viễn.
what-to-do = Cần làm gì
step-book = Gọi cho bác sĩ mắt có khám trẻ em. Hãy nói: “Con tôi cần được khám mắt sau khi kiểm tra thị lực ở trường.”
step-bring = Mang theo thư này và mẫu báo cáo.
step-return = Nhờ bác sĩ điền mẫu. Gửi lại cho trường.
act-by = Xin đi khám trước { $date }.
cost-help = Hỗ trợ chi phí: { $help }
interpreter = Quý vị có thể yêu cầu thông dịch viên. Quý vị không phải trả tiền.

title-urgent = Con của quý vị cần gặp bác sĩ mắt sớm
result-urgent = Chúng tôi thấy ở { $child } một điều mà bác sĩ mắt cần xem sớm.
title-emergency = Con của quý vị cần được giúp đỡ ngay hôm nay
result-emergency = Chúng tôi thấy ở { $child } một điều phải được khám ngay hôm nay.
step-now = Hãy đến khoa cấp cứu hoặc phòng cấp cứu mắt ngay bây giờ. Mang theo thư này.
call-record = Chúng tôi đã nói chuyện với { $whom } vào { $date }.
call-none = Chúng tôi chưa liên lạc được với quý vị qua điện thoại.

title-rescreen = Chúng tôi sẽ kiểm tra lại thị lực của con quý vị
result-rescreen = { $child } cần được kiểm tra lần thứ hai. Điều này thường gặp: em có thể mệt hoặc chưa hiểu. Chúng tôi sẽ kiểm tra lại trước { $date }. Hiện giờ quý vị không cần làm gì.
result-rescreen-undated = { $child } cần được kiểm tra lần thứ hai. Điều này thường gặp: em có thể mệt hoặc chưa hiểu. Chúng tôi sẽ kiểm tra lại. Hiện giờ quý vị không cần làm gì.

title-glasses = Xin cho con quý vị mang kính đến trường
result-glasses = { $child } có kính nhưng không mang theo vào ngày kiểm tra. Xin cho em mang kính đến trường mỗi ngày. Chúng tôi sẽ kiểm tra lại trước { $date }.
result-glasses-undated = { $child } có kính nhưng không mang theo vào ngày kiểm tra. Xin cho em mang kính đến trường mỗi ngày. Chúng tôi sẽ kiểm tra lại.
glasses-lost = Nếu kính bị mất, bị hỏng hoặc quá cũ, xin cho chúng tôi biết.

title-second = Chúng tôi đã viết thư cho quý vị: con quý vị cần được khám mắt
result-second = Vào { $date }, chúng tôi đã viết rằng { $child } cần được khám mắt. Chúng tôi chưa biết việc khám đã diễn ra hay chưa.
result-second-undated = Chúng tôi đã viết rằng { $child } cần được khám mắt. Chúng tôi chưa biết việc khám đã diễn ra hay chưa.

title-passed = Con của quý vị đã đạt khi kiểm tra thị lực
result-passed = { $child } đã đạt.

title-color = Về màu sắc
result-color = { $child } gặp khó khăn khi phân biệt một số màu. Điều này thường gặp và không cần chữa. Xin báo cho giáo viên để gọi tên màu bằng lời.

title-doctor = Kết quả kiểm tra thị lực
greeting-doctor = Kính gửi { $doctor }
result-doctor = { $child } đã được kiểm tra vào { $date } tại { $site }. Kết quả: { $outcome }.
doctor-ask = Xin cho chúng tôi biết nếu { $child } đang được điều trị.

answer-heading = Xin cắt phần này và gửi lại cho trường
answer-examined = Con tôi đã được khám. Ngày: ____________  Người khám: ______________________
answer-declined = Chúng tôi từ chối khám.
answer-call = Xin gọi cho tôi. Giờ thuận tiện: ____________
answer-sign = Chữ ký: ______________________________  Ngày: ____________
code-line = Mã { $code }

title-form = Báo cáo khám mắt
form-intro = Dành cho người khám: xin điền và gửi lại, hoặc gọi { $phone } và đọc mã.
form-intro-no-phone = Dành cho người khám: xin điền và gửi lại cho trường.
form-date = Ngày khám
form-examiner = Người khám, điện thoại
form-without = Thị lực không kính
form-with = Thị lực với kính đang đeo
form-refraction = Khúc xạ (cầu, trụ, trục)
form-how = Bằng: ☐ soi bóng đồng tử ☐ máy đo khúc xạ ☐ chủ quan. Liệt điều tiết: ☐ không ☐ với ____________
form-best = Thị lực sau chỉnh kính tối đa
form-cover = Che mắt: ☐ không di chuyển ☐ lác ẩn ☐ lác từng lúc ☐ lác thường xuyên, mắt ______ hướng ______ điốp lăng kính ____
form-stereo = Thị giác lập thể, giây cung: ______
form-fundus = Đáy mắt, bình thường / bất thường
form-amblyopia = Nhược thị: không / nghi ngờ / có
form-normal = ☐ Không có bất thường
form-findings = Kết luận (ICD-10-CM)
form-treatment = Điều trị: ☐ không ☐ kính ☐ kính áp tròng ☐ bịt mắt ☐ thuốc nhỏ ☐ đề nghị phẫu thuật ☐ theo dõi ☐ chuyển tiếp
form-wear = Đeo kính: ☐ mọi lúc ☐ nhìn xa ☐ nhìn gần ☐ trong lớp
form-prescription = Đơn kính (cầu, trụ, trục)
form-return = Lần khám tới
form-classroom = Lời khuyên cho lớp học
form-consent = ☐ Gia đình đồng ý gửi báo cáo này cho trường.
form-sign = Chữ ký người khám
