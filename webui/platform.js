// What the phone's Python may ask of the browser: storage, keys, digests, files, network, time.
// Classic script, no dependencies. Across the border go strings, numbers and JSON text only, because Brython turns
// null, nested objects and None into things that the other side does not know. Every function returns a promise of
// text unless its line says otherwise; "" stands for "there is none". A promise is refused with an Error whose
// message begins with the name of the DOMException ("QuotaExceededError: ...") or is one of those quoted below.
window.platform = (function () {
  'use strict'
  const encoder = new TextEncoder()
  const CURVE = {name: 'ECDSA', namedCurve: 'P-256'}
  const SIGNATURE = {name: 'ECDSA', hash: 'SHA-256'}
  const LOCK = 'fieldcheck chain'
  const channel = new BroadcastChannel('fieldcheck')
  let opened = null

  // ---- the database -------------------------------------------------------------------------------------------

  function upgrade(db) {
    const events = db.createObjectStore('events', {keyPath: ['device', 'seq']})
    events.createIndex('job', 'job')
    events.createIndex('hash', 'hash', {unique: true})
    events.createIndex('sent', 'sent')               // 0 or 1: a boolean cannot be a key
    for (const name of ['heads', 'drafts', 'parts', 'blobs', 'keys', 'settings']) db.createObjectStore(name)
  }

  function named(error) {
    if (!error) return new Error('AbortError: the transaction was broken off')
    if (error instanceof DOMException) return new Error(error.name + ': ' + error.message)
    return error instanceof Error ? error : new Error(String(error))
  }

  function database() {
    if (opened) return opened
    opened = new Promise((done, refuse) => {
      const request = indexedDB.open('fieldcheck', 1)
      request.onupgradeneeded = () => upgrade(request.result)
      request.onerror = () => { opened = null; refuse(named(request.error)) }
      request.onsuccess = () => {
        const db = request.result
        db.onversionchange = () => { db.close(); opened = null }   // another tab brings a newer form
        db.onclose = () => { opened = null }
        done(db)
      }
    })
    return opened
  }

  // One transaction. work(stores, answer, stop) only makes requests: answer(x) sets what the promise will give,
  // stop(message) undoes everything. The promise is kept only when the transaction is complete on disk.
  async function transaction(names, mode, work) {
    const db = await database()
    return new Promise((done, refuse) => {
      let result = '', problem = null
      const tx = db.transaction(names, mode, {durability: mode === 'readwrite' ? 'strict' : 'default'})
      const stores = Object.fromEntries(names.map(name => [name, tx.objectStore(name)]))
      const stop = message => { problem = new Error(message); tx.abort() }
      tx.oncomplete = () => done(result)
      tx.onabort = () => refuse(problem || named(tx.error))
      try {
        work(stores, value => { result = value }, stop)
      } catch (error) {
        problem = named(error)
        tx.abort()
      }
    })
  }

  function put(store, key, value) {
    return transaction([store], 'readwrite', stores => { stores[store].put(value, String(key)) })
  }

  function get(store, key) {
    return transaction([store], 'readonly', (stores, answer) => {
      stores[store].get(String(key)).onsuccess = event => {
        if (event.target.result !== undefined) answer(event.target.result)
      }
    })
  }

  // JSON text of a list made of each row of a request for all.
  function list(store, ask, row) {
    return transaction([store], 'readonly', (stores, answer) => {
      ask(stores[store]).onsuccess = event => answer(JSON.stringify(event.target.result.map(row)))
    })
  }

  const shown = row => ({device: row.device, seq: row.seq, job: row.job, hash: row.hash, text: row.text,
    signature: row.signature || ''})                 // of a signing event, by this device

  // ---- the chain ----------------------------------------------------------------------------------------------

  // Refused with "head moved" when another tab appended since the head was read: read it again, under withLock.
  // The transaction waits for nothing but IndexedDB. Killed before it is complete: nothing happened, draft kept.
  async function append(text, device, seq, prev, hash, job, draft, signature) {
    await transaction(['events', 'heads', 'drafts'], 'readwrite', (stores, answer, stop) => {
      stores.heads.get(String(device)).onsuccess = event => {
        const head = event.target.result || {seq: 0, hash: ''}
        if (head.seq !== Number(seq) - 1 || head.hash !== String(prev)) return stop('head moved')
        stores.events.add({device: String(device), seq: Number(seq), job: String(job), hash: String(hash),
          text: String(text), sent: 0, signature: String(signature || '')})
        stores.heads.put({seq: Number(seq), hash: String(hash)}, String(device))
        if (draft) stores.drafts.delete(String(draft))
      }
    })
    channel.postMessage(String(job))
    return String(hash)
  }

  // Events that the server sent: [{device, seq, job, hash, text}]. One that is here already counts as sent from now
  // on. Gives JSON text of the hashes that were new. Another text at the same place undoes all: "fork at DEVICE SEQ".
  async function addForeign(json) {
    const rows = JSON.parse(json)
    const fresh = []
    await transaction(['events'], 'readwrite', (stores, answer, stop) => {
      for (const row of rows) {
        stores.events.get([row.device, row.seq]).onsuccess = event => {
          const old = event.target.result
          if (!old) {
            stores.events.add({...shown(row), sent: 1})
            fresh.push(row.hash)
          } else if (old.hash !== row.hash) {
            stop('fork at ' + row.device + ' ' + row.seq)
          } else if (!old.sent) {
            stores.events.put({...old, sent: 1})
          }
        }
      }
    })
    if (fresh.length) channel.postMessage('')
    return JSON.stringify(fresh)
  }

  function markSent(json) {
    return transaction(['events'], 'readwrite', stores => {
      for (const hash of JSON.parse(json)) {
        stores.events.index('hash').get(hash).onsuccess = event => {
          if (event.target.result) stores.events.put({...event.target.result, sent: 1})
        }
      }
    })
  }

  // ---- keys and digests ---------------------------------------------------------------------------------------

  const hex = buffer => Array.from(new Uint8Array(buffer), byte => byte.toString(16).padStart(2, '0')).join('')
  const unhex = text => Uint8Array.from(text.match(/../g) || [], pair => parseInt(pair, 16))
  const digest = async bytes => hex(await crypto.subtle.digest('SHA-256', bytes))

  // Makes this browser profile's key, which nothing can export, and gives its raw public key as hex. A profile is one
  // device: where one exists (another tab was quicker), that one stays and its public key is given; see device().
  async function makeDevice(id) {
    const pair = await crypto.subtle.generateKey(CURVE, false, ['sign', 'verify'])
    const publicKey = hex(await crypto.subtle.exportKey('raw', pair.publicKey))
    return transaction(['keys', 'settings'], 'readwrite', (stores, answer) => {
      stores.settings.get('device').onsuccess = event => {
        const existing = event.target.result
        if (existing !== undefined) {
          stores.keys.get(existing).onsuccess = found => answer(found.target.result.publicKey)
          return
        }
        stores.keys.add({privateKey: pair.privateKey, publicKey, device: String(id)}, String(id))
        stores.settings.put(String(id), 'device')
        answer(publicKey)
      }
    })
  }

  // ECDSA P-256 over SHA-256 of the text's UTF-8, as hex of r and s. "no device" before makeDevice.
  async function sign(text) {
    const key = await get('keys', await get('settings', 'device'))
    if (key === '') throw new Error('no device')
    return hex(await crypto.subtle.sign(SIGNATURE, key.privateKey, encoder.encode(String(text))))
  }

  // ---- blobs, files, network ----------------------------------------------------------------------------------

  async function putBlob(blob) {                     // gives the SHA-256 that names it
    const name = await digest(await blob.arrayBuffer())
    await put('blobs', name, blob)
    return name
  }

  async function getBlob(name) {                     // gives an address for <img>; release it with dropUrl
    const blob = await get('blobs', name)
    return blob === '' ? '' : URL.createObjectURL(blob)
  }

  // JSON text {status, text}; status 0 when no server answered within 30 seconds.
  async function request(method, url, body, headers) {
    const stop = new AbortController()
    const timer = setTimeout(() => stop.abort(), 30000)
    try {
      const answer = await fetch(url, {method, body, headers, signal: stop.signal, cache: 'no-store'})
      return JSON.stringify({status: answer.status, text: await answer.text()})
    } catch (error) {
      return JSON.stringify({status: 0, text: named(error).message})
    } finally {
      clearTimeout(timer)
    }
  }

  function fetchJson(method, url, body, headers) {
    const given = headers ? JSON.parse(headers) : {}
    if (body) given['Content-Type'] = 'application/json'
    return request(String(method), String(url), body ? String(body) : undefined, given)
  }

  async function sendBlob(name, url, headers) {      // PUT of a stored blob's bytes; JSON text as fetchJson
    const blob = await get('blobs', name)
    if (blob === '') throw new Error('NotFoundError: no blob ' + name)
    return request('PUT', String(url), blob, headers ? JSON.parse(headers) : {})
  }

  async function downloadText(name, text) {
    const link = document.createElement('a')
    link.href = URL.createObjectURL(new Blob([String(text)], {type: 'text/plain;charset=utf-8'}))
    link.download = String(name)
    link.click()
    setTimeout(() => URL.revokeObjectURL(link.href), 60000)
    return ''
  }

  // ---- plain JSON ---------------------------------------------------------------------------------------------

  // Is this a JSON text that JSON.parse reads exactly as engine/texts.py does? "No" is always a safe answer: escapes,
  // surrogates, numbers that are not short integers, blanks, keys twice or of an unusual kind are left to Python.
  const UNUSUAL = /[\\\ud800-\udfff]|__proto__|hasOwnProperty/
  const UNUSUAL_BETWEEN = /[\s.E]|-0|[0-9]e|[0-9]{16}/
  const DEPTH = 32

  function isPlain(text) {
    if (UNUSUAL.test(text)) return false
    const between = text.split('"').filter((_, number) => (number & 1) === 0).join('')
    if (UNUSUAL_BETWEEN.test(between)) return false
    try {
      return keysIn(JSON.parse(text), 0) === between.split(':').length - 1
    } catch (error) {
      return false
    }
  }

  // How many keys a value holds, one inside the other; NaN where one of them might change its place or the levels are
  // too many. A key that stands twice in the text is counted once, and so gives the text away.
  function keysIn(value, depth) {
    if (typeof value !== 'object' || value === null) return 0
    if (depth >= DEPTH) return NaN
    let count = 0
    for (const key of Object.keys(value)) {
      if (!Array.isArray(value)) count += /^[\x20-\x7f]+$/.test(key) && !/^[0-9]+$/.test(key) ? 1 : NaN
      count += keysIn(value[key], depth + 1)
    }
    return count
  }

  return {
    withLock: work => navigator.locks.request(LOCK, () => work()),   // gives what work (an async def) gives
    append, addForeign, markSent,
    head: async device => JSON.stringify(await get('heads', device) || {seq: 0, hash: ''}),
    eventsOf: job => list('events', store => store.index('job').getAll(String(job)), row => [row.hash, row.text]),
    events: () => list('events', store => store.getAll(), row => [row.hash, row.text]),
    unsent: () => list('events', store => store.index('sent').getAll(0), shown),   // by device and sequence
    onChange: act => { channel.onmessage = event => act(event.data) },   // another tab appended; not a promise

    makeDevice, sign,
    device: () => get('settings', 'device'),
    publicKey: async () => (await get('keys', await get('settings', 'device'))).publicKey || '',
    sha256: text => digest(encoder.encode(String(text))),
    sha256hex: bytes => digest(unhex(String(bytes))),
    sha256blob: async blob => digest(await blob.arrayBuffer()),
    random: async count => hex(crypto.getRandomValues(new Uint8Array(Number(count)))),

    putDraft: (key, text) => put('drafts', key, String(text)),
    getDraft: key => get('drafts', key),
    dropDraft: key => transaction(['drafts'], 'readwrite', stores => { stores.drafts.delete(String(key)) }),
    drafts: () => transaction(['drafts'], 'readonly', (stores, answer) => {        // JSON list of [key, text]
      const found = []
      stores.drafts.openCursor().onsuccess = event => {
        const cursor = event.target.result
        if (!cursor) return answer(JSON.stringify(found))
        found.push([cursor.key, cursor.value])
        cursor.continue()
      }
    }),
    putPart: (key, text) => put('parts', key, String(text)),
    getPart: key => get('parts', key),
    putSetting: (key, text) => put('settings', key, String(text)),
    getSetting: key => get('settings', key),

    putBlob, getBlob, sendBlob,
    blobs: () => list('blobs', store => store.getAllKeys(), name => name),
    dropUrl: url => URL.revokeObjectURL(url),        // not a promise
    fetchJson, downloadText,

    isPlain: text => isPlain(String(text)),          // not a promise
    loadChunk: name => window.fieldcheckChunks.load(String(name)),   // "screens", "physics", "physics.windings"
    buzz: ms => Boolean(navigator.vibrate && navigator.vibrate(Number(ms))),       // not a promise
    monotonic: () => performance.now(),              // milliseconds since the page began; not a promise
    wall: () => Date.now()                           // milliseconds since 1970; not a promise
  }
})()
