// Takes the place of Brython's importers: modules come from chunks that were translated when the package was built.
// Loaded after brython.js and before every chunk. No eval, no new Function, no request for a .py file.
// Classic script, sloppy mode, because the translated code is; everything outside goes through window.fieldcheckChunks.
(function ($B) {
  var _b_ = $B.builtins
  var modules = Object.create(null)      // dotted name -> {pkg, js, file, run}
  var chunks = Object.create(null)       // chunk name -> {url, integrity}
  var arrived = Object.create(null)      // chunk name -> true
  var loading = Object.create(null)      // chunk name -> promise
  var failures = Object.create(null)     // chunk name -> how often it did not load
  var here = typeof document === 'undefined' || !document.currentScript ? '' : document.currentScript.src

  function run(name, module) {
    var entry = modules[name]
    module.$is_package = entry.pkg
    $B.module_setattr(module, '__file__', entry.file)
    $B.url2name[entry.file] = name
    var names = entry.run()
    if (entry.js) {                      // a JavaScript module registers itself under its name
      var made = $B.imported[name]
      made.ob_type = $B.module
      $B.module_setattr(made, '__name__', name)
      return
    }
    for (var key in names) $B.module_setattr(module, key, names[key])
    $B.module_setattr(module, '__initializing__', false)
  }

  // Classes made after brython.js has loaded must be initialised and finalised by hand.
  var Loader = $B.make_builtin_class('ChunkLoader')
  $B.init_dict(Loader)
  Loader.tp_funcs = {
    create_module: function () { return _b_.None },
    exec_module: function (self, module) { run($B.module_getattr(module, '__name__'), module) }
  }
  Loader.tp_methods = ['create_module', 'exec_module']
  $B.set_func_names(Loader, 'builtins')
  $B.finalize_type(Loader)
  var loader = {ob_type: Loader}
  $B.init_dict(loader)

  var Finder = $B.make_builtin_class('ChunkFinder')
  $B.init_dict(Finder)
  Finder.tp_funcs = {
    find_spec: function (cls, name) {
      var entry = modules[name]
      if (entry === undefined) return _b_.None
      return $B.ModuleSpec.$factory({
        name: name, loader: loader, origin: 'chunk', loader_state: entry, cached: _b_.None, has_location: _b_.False,
        submodule_search_locations: entry.pkg ? $B.$list([]) : _b_.None,
        parent: entry.pkg ? name : name.split('.').slice(0, -1).join('.')
      })
    }
  }
  Finder.classmethods = ['find_spec']
  $B.set_func_names(Finder, '<import>')
  $B.finalize_type(Finder)

  // Brython would look for an unknown module by synchronous requests to the server. Here it simply does not exist.
  $B.make_import_paths = function (file) {
    $B.import_info[file] = {meta_path: [Finder], path_hooks: [], path: []}
  }

  function begin(name) {                 // runs a module as the program; Brython prints what goes wrong to sys.stderr
    var module = $B.imported[name] = $B.module.$factory(name)
    try { run(name, module) } catch (error) { $B.handle_error($B.exception(error)) }
  }

  function fetchOne(name) {
    if (arrived[name]) return Promise.resolve(name)
    if (loading[name]) return loading[name]
    return loading[name] = new Promise(function (done, refuse) {
      var script = document.createElement('script')
      var again = failures[name] ? '?' + failures[name] : ''     // past a cache that holds a damaged copy
      script.src = new URL(chunks[name].url + again, here).href
      script.integrity = chunks[name].integrity
      script.onload = function () { done(name) }
      script.onerror = function () {     // forgotten, so that the next call tries again
        delete loading[name]
        failures[name] = (failures[name] || 0) + 1
        script.remove()
        refuse(new Error('The part "' + name + '" of the program did not load.'))
      }
      document.head.appendChild(script)
    })
  }

  // A name stands for itself and for every chunk below it: "physics" loads "physics.windings" too.
  function family(name) {
    return Object.keys(chunks).filter(function (one) { return one === name || one.indexOf(name + '.') === 0 })
  }

  globalThis.fieldcheckChunks = {
    build: {},                           // {version, build}: set by the core chunk
    register: function (name, table) {
      for (var key in table) modules[key] = table[key]
      arrived[name] = true
      $B.stdlib_module_names = Object.keys(modules)
    },
    table: function (build, table) {
      globalThis.fieldcheckChunks.build = build
      for (var key in table) chunks[key] = table[key]
    },
    has: function (module) { return modules[module] !== undefined },
    names: function () { return Object.keys(chunks) },
    load: function (name) {
      var wanted = family(name)
      if (wanted.length === 0 && !arrived[name]) {
        return Promise.reject(new Error('There is no part "' + name + '" of the program.'))
      }
      return Promise.all(wanted.map(fetchOne)).then(function () { return name })
    },
    begin: begin
  }
})(__BRYTHON__)
