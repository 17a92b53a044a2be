# Español.
language-name = Español
direction = ltr
draft = Borrador: que lo revise una persona que hable el idioma

month-1 = enero
month-2 = febrero
month-3 = marzo
month-4 = abril
month-5 = mayo
month-6 = junio
month-7 = julio
month-8 = agosto
month-9 = septiembre
month-10 = octubre
month-11 = noviembre
month-12 = diciembre
date = { $day } de { $month } de { $year }

greeting = A la madre, al padre o al tutor de { $child }
child-line = { $child }, fecha de nacimiento { $born }, { $class }
child-line-unborn = { $child }, { $class }
tested = El { $date } revisamos la vista de { $child } en { $site }.
not-an-exam = Esta fue una prueba de detección, no un examen de los ojos. Un niño puede pasar la prueba y tener un problema de los ojos. Si algo le preocupa, pregunte a un oculista.
urgent-signs = Si un ojo se ve blanco en las fotos, se desvía de repente, duele, sufrió un golpe, o la vista empeora de repente: busque ayuda hoy mismo. No espere una carta.
questions = ¿Preguntas? { $who }, { $phone }
questions-no-phone = ¿Preguntas? Hable con { $who }.
local-rules = Las normas locales y el consejo de su oculista van primero.

found-heading = Lo que revisamos
test = Prueba
right-eye = Ojo derecho
left-eye = Ojo izquierdo
both-eyes = Ambos ojos
test-distance = Leer letras de lejos
test-near = Leer de cerca
test-plus = Leer a través de una lente
test-stereo = Usar los dos ojos juntos
test-cover = Ver si un ojo se desvía
test-reflex = Luz dirigida al ojo
test-color = Distinguir colores
test-instrument = Medido con un aparato
not-done = no se revisó
not-testable = no se pudo revisar
value-fine = sin problema
value-look = un oculista debe revisar
what-it-means = Qué significa
glasses-worn = { $child } llevaba lentes durante la prueba.
contacts-worn = { $child } llevaba lentes de contacto durante la prueba.
glasses-none = { $child } no llevaba lentes durante la prueba y no tiene.
glasses-not-worn = { $child } tiene lentes y no los llevaba durante la prueba.
glasses-unknown = No anotamos si llevaba lentes.

title-referral = Su hijo o hija necesita un examen de los ojos
result-referral = { $child } no pasó la prueba. { $child } necesita un examen completo con un oculista.
result-history = Revisamos a { $child }. Por lo que se sabe de la salud o la familia de { $child }, aconsejamos un examen completo con un oculista, diga lo que diga la prueba de letras.
result-untested = No pudimos revisar bien a { $child }. { $child } necesita un examen completo con un oculista.
why-heading = Por qué es importante
why = Muchos niños que ven mal con un ojo no se dan cuenta. Si se descubre temprano, casi siempre se puede tratar. Si se descubre tarde, la vista puede perderse para siempre.
what-to-do = Qué hacer
step-book = Llame a un oculista que atienda a niños. Diga: «Mi hijo o hija necesita un examen de los ojos después de la prueba de la vista en la escuela».
step-bring = Lleve esta carta y el formulario.
step-return = Pida al oculista que llene el formulario. Devuélvalo a la escuela.
act-by = Por favor vaya antes del { $date }.
cost-help = Ayuda con el costo: { $help }
interpreter = Puede pedir un intérprete. No le cuesta nada.

title-urgent = Su hijo o hija necesita ver pronto a un oculista
result-urgent = Vimos algo en { $child } que un oculista debe revisar pronto.
title-emergency = Su hijo o hija necesita ayuda hoy
result-emergency = Vimos algo en { $child } que hay que revisar hoy mismo.
step-now = Vaya ahora a urgencias o a una clínica de urgencias de los ojos. Lleve esta carta.
call-record = Hablamos con { $whom } el { $date }.
call-none = No hemos podido comunicarnos con usted por teléfono.

title-rescreen = Vamos a revisar otra vez la vista de su hijo o hija
result-rescreen = Hay que revisar a { $child } una segunda vez. Es común: un niño puede estar cansado o no entender. Vamos a repetir la prueba antes del { $date }. Por ahora usted no tiene que hacer nada.
result-rescreen-undated = Hay que revisar a { $child } una segunda vez. Es común: un niño puede estar cansado o no entender. Vamos a repetir la prueba. Por ahora usted no tiene que hacer nada.

title-glasses = Por favor mande los lentes de su hijo o hija a la escuela
result-glasses = { $child } tiene lentes y no los traía el día de la prueba. Por favor mándelos todos los días a la escuela. Vamos a repetir la prueba antes del { $date }.
result-glasses-undated = { $child } tiene lentes y no los traía el día de la prueba. Por favor mándelos todos los días a la escuela. Vamos a repetir la prueba.
glasses-lost = Si los lentes se perdieron, se rompieron o son muy viejos, por favor avísenos.

title-second = Ya le escribimos: su hijo o hija necesita un examen de los ojos
result-second = El { $date } le escribimos que { $child } necesita un examen de los ojos. Todavía no sabemos si se hizo.
result-second-undated = Le escribimos que { $child } necesita un examen de los ojos. Todavía no sabemos si se hizo.

title-passed = Su hijo o hija pasó la prueba de la vista
result-passed = { $child } pasó la prueba.

title-color = Sobre los colores
result-color = A { $child } le costó distinguir algunos colores. Es común y no necesita tratamiento. Dígaselo al maestro, para que los colores también se nombren con palabras.

title-doctor = Resultado de una prueba de la vista
greeting-doctor = Para { $doctor }
result-doctor = { $child } hizo la prueba el { $date } en { $site }. Resultado: { $outcome }.
doctor-ask = Por favor avísenos si { $child } ya está en tratamiento.

answer-heading = Por favor corte aquí y devuelva a la escuela
answer-examined = Mi hijo o hija ya fue examinado. Fecha: ____________  Por: ______________________
answer-declined = No queremos el examen.
answer-call = Por favor llámeme. Mejor hora: ____________
answer-sign = Firma: ______________________________  Fecha: ____________
code-line = Código { $code }

title-form = Informe de un examen de los ojos
form-intro = Para quien examina: por favor llene y devuelva, o llame al { $phone } y diga el código.
form-intro-no-phone = Para quien examina: por favor llene y devuelva a la escuela.
form-date = Fecha del examen
form-examiner = Quién examinó, teléfono
form-without = Agudeza sin lentes
form-with = Agudeza con los lentes que usa
form-refraction = Refracción (esfera, cilindro, eje)
form-how = Por: ☐ retinoscopia ☐ autorrefracción ☐ subjetiva. Cicloplejia: ☐ no ☐ con ____________
form-best = Agudeza con la mejor corrección
form-cover = Prueba de cubrir: ☐ sin movimiento ☐ foria ☐ intermitente ☐ constante, ojo ______ dirección ______ dioptrías prismáticas ____
form-stereo = Visión estereoscópica, segundos de arco: ______
form-fundus = Fondo de ojo, normal / anormal
form-amblyopia = Ambliopía: no / sospecha / sí
form-normal = ☐ Sin anormalidad
form-findings = Hallazgos (ICD-10-CM)
form-treatment = Tratamiento: ☐ ninguno ☐ lentes ☐ lentes de contacto ☐ parche ☐ gotas ☐ cirugía aconsejada ☐ observación ☐ enviado a otro servicio
form-wear = Uso de los lentes: ☐ siempre ☐ lejos ☐ cerca ☐ en clase
form-prescription = Receta (esfera, cilindro, eje)
form-return = Próxima visita
form-classroom = Consejo para la clase
form-consent = ☐ La familia está de acuerdo en que este informe llegue a la escuela.
form-sign = Firma de quien examinó
