// Generated from the statement catalogue; do not edit.
export const meanwise = (function () {
  var verbs = new Set(["amend","assume","audit","average","blocks","calibrate","check","compare","contrast","covariate","data","derive","describe","detectable","draw","exclude","expect","explore","export","factor","family","help","items","omnibus","open","power","read","rehearse","report","response","seal","set","show","size","study","subjects"]);
  var methods = new Set(["bh","bonferroni","by","conover","down","dunn","dunnett","fallback","fixed","games","graph","hochberg","holm","hommel","howell","nemenyi","none","resampling","scheffe","sequence","shaffer","sidak","single","step","tukey"]);
  var words = new Set(["abs","adjusted","after","against","all","allocation","amend","among","analysis","and","any","as","assume","at","audit","average","because","beside","better","between","bh","blocks","bonferroni","bootstrap","both","brown","by","calibrate","calibration","caution","centred","check","comma","compare","comparison","comparisons","compound","conover","contrast","control","correlation","cost","covariate","cubic","data","decimal","default","degrees","derive","describe","description","design","detectable","difference","digits","discovery","distributions","down","draw","drop","dropout","dunn","dunnett","each","else","encoding","equal","error","every","exclude","exp","expect","explore","export","factor","fallback","false","families","family","fixed","fold","for","forsythe","from","games","graph","head","heavy","help","higher","hochberg","hold","holm","hommel","howell","if","in","interval","into","is","items","kenward","ledger","linear","log","log10","lower","margin","marginality","mean","means","measured","median","methods","missing","model","multilevel","multivariate","neighbours","nemenyi","nested","none","normal","not","of","omnibus","on","one","open","or","ordered","other","over","p","pairs","pass","passing","per","picture","plan","point","pooled","power","profiles","quadratic","quartic","quartiles","quintic","ranks","read","reference","rehearse","rename","report","resamples","resampling","residuals","respecting","response","roger","root","round","satterthwaite","scale","scheffe","seal","seed","separator","sequence","set","settings","shaffer","shape","shard","sheet","show","sidak","sided","single","size","skewed","slopes","sphericity","spread","standardiser","step","studies","study","subject","subjects","symmetry","table","tails","then","thresholds","to","trend","tukey","unequal","unstructured","upper","variance","variances","weights","welch","where","with","within","worse"]);
  var names = {"verb":"keyword","method":"builtin","word":"atom","name":"variable","number":"number","string":"string","comment":"comment","mark":"operator","wrong":"error"};
  function token(stream) {
    var atMargin = stream.sol();
    if (stream.match(/^[\s\ufeff]+/)) return null;
    if (stream.match(/^#.*/)) return names.comment;
    if (stream.match(/^"(?:[^"]|"")*"/)) return names.string;
    if (stream.match(/^".*/)) return names.wrong;
    if (stream.match(/^[\u201c\u201d\u201e\u00ab][^\u201c\u201d\u201e\u00bb"]*[\u201c\u201d\u00bb"]?/)) return names.wrong;
    if (stream.match(/^\d+(?:\.\d+)?(?:[eE][+-]?\d+)?(?![eE][+-]?\d)[\p{L}\p{M}_][\p{L}\p{M}\p{N}_]*/u)) return names.wrong;
    if (stream.match(/^(?:\d+(?:\.\d+)?|\.\d+)(?:[eE][+-]?\d+)?%?/)) return names.number;
    var word = stream.match(/^[\p{L}_][\p{L}\p{M}\p{N}_]*/u);
    if (word) {
      if (atMargin && verbs.has(word[0])) return names.verb;
      if (methods.has(word[0])) return names.method;
      return words.has(word[0]) ? names.word : names.name;
    }
    if (stream.match(/^(?:!=|<=|>=|[≠≤≥=<>:,()+\-\u2212\u2013*×\/÷^])/)) return names.mark;
    stream.match(/^[^]/u);
    return names.wrong;
  }
  return { name: "meanwise", token: token, languageData: { commentTokens: { line: "#" } } };
})();
