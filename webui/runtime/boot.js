// Starts the program, fetches the other chunks when the page is idle, and shows the one page for anything uncaught.
// Last of the deferred scripts, so that it runs before DOMContentLoaded and after everything it needs.
(function () {
  'use strict'
  var report = []                        // what went wrong so far, oldest first

  function element(kind, text, cls) {
    var made = document.createElement(kind)
    if (text) made.textContent = text
    if (cls) made.className = cls
    return made
  }

  function lastLine(text) {
    var lines = text.split('\n').filter(function (line) { return line.trim() !== '' })
    return lines.length ? lines[lines.length - 1].trim() : 'no reason given'
  }

  function reportText() {
    var build = (window.fieldcheckChunks && window.fieldcheckChunks.build) || {}
    return 'fieldcheck ' + (build.version || '?') + ' build ' + (build.build || '?') + '\n' +
      navigator.userAgent + '\n' + location.pathname + location.hash.split('?')[0] + '\n\n' + report.join('\n\n')
  }

  function button(label, act) {
    var made = element('button', label)
    made.type = 'button'
    made.addEventListener('click', act)
    return made
  }

  function copy(box) {
    box.focus()
    box.select()                         // also the way by hand, where the clipboard is refused
    if (navigator.clipboard) navigator.clipboard.writeText(box.value).catch(function () {})
  }

  function show() {
    var old = document.getElementById('failed')
    if (old) {
      old.querySelector('textarea').value = reportText()
      return
    }
    var page = element('section', '', 'failed')
    page.id = 'failed'
    page.setAttribute('role', 'alert')
    page.setAttribute('aria-labelledby', 'failed-title')
    var title = element('h2', 'The program met a fault.')
    title.id = 'failed-title'
    var box = element('textarea')
    box.readOnly = true
    box.rows = 8
    box.setAttribute('aria-label', 'Report of the fault')
    box.value = reportText()
    page.append(title, element('p', 'What happened: ' + lastLine(report[0])),
      element('p', 'Nothing that was taken is lost.'), box,
      button('Copy the report', function () { copy(box) }),
      button('Start again', function () { location.reload() }))
    document.body.prepend(page)
  }

  // Called by the Python side with a whole traceback, and by the listeners below. It must never throw.
  window.fieldcheckFailed = function (text) {
    try {
      text = String(text).trim().slice(0, 20000)
      if (text === '' || report.indexOf(text) !== -1 || report.length >= 20) return
      report.push(text)
      show()
    } catch (error) { console.error(error, text) }
  }

  // An exception of the Python side travels as an object of Brython's; its traceback must be asked for.
  function textOf(error, message) {
    if (error instanceof Error) return error.stack && error.stack.indexOf(error.message) !== -1
      ? error.stack + '\n' + error.name + ': ' + error.message : error.name + ': ' + error.message
    try {
      if (error && error.ob_type) return __BRYTHON__.error_trace(__BRYTHON__.exception(error))
    } catch (other) { /* then its message must do */ }
    return message || String(error)
  }

  window.addEventListener('error', function (event) {
    window.fieldcheckFailed(textOf(event.error, event.message))
  })
  window.addEventListener('unhandledrejection', function (event) {
    window.fieldcheckFailed(textOf(event.reason, ''))
  })

  function idle(act) {
    if (window.requestIdleCallback) window.requestIdleCallback(act, {timeout: 2000})
    else setTimeout(act, 200)
  }

  function fetchTheRest() {
    var names = fieldcheckChunks.names()
    idle(function next() {
      var name = names.shift()           // one at a time; what fails is fetched again when it is asked for
      if (name) fieldcheckChunks.load(name).catch(function () {}).then(function () { idle(next) })
    })
  }

  if (!window.__BRYTHON__ || !window.fieldcheckChunks || !window.platform || !fieldcheckChunks.has('__main__')) {
    window.fieldcheckFailed('A part of the program did not load.')
    return
  }
  document.body.onload = function () {}  // else Brython starts itself a second time and forgets these options
  brython({indexeddb: false})
  fieldcheckChunks.begin('__main__')
  performance.mark('fieldcheck started')
  requestAnimationFrame(function () { setTimeout(fetchTheRest) })
})()
