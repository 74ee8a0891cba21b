//! Tokens to expressions by the published grammar, one function a rule of it. In: tokens of accepted text. Out: trees of
//! words as written; no name is looked up here.

use super::text::{Q, Token, q};
use num_traits::Zero;

/// Which way a rounding goes.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Way {
    Up,
    Down,
    HalfUp,
    HalfDown,
    HalfEven,
}

/// A comparison.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Test {
    Above,
    Below,
    AtLeast,
    AtMost,
    Is,
    IsNot,
}

/// A sign or word between two quantities.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Sign {
    Add,
    Subtract,
    Multiply,
    Divide,
    Beyond,
    LimitedTo,
    RaisedTo,
}

/// What stands behind `sum over`, `first`, `place` and the like.
#[derive(Clone, Debug)]
pub struct Search {
    pub kind: String,
    pub by: String,
    pub down: bool,
    pub with: Option<Box<Expr>>,
}

#[derive(Clone, Debug)]
pub enum Expr {
    Number(Q),
    Day(i64),
    YesNo(bool),
    Name(String),
    Of {
        name: String,
        whose: String,
        failing: Option<Box<Expr>>,
    },
    Lookup {
        table: String,
        keys: Vec<Expr>,
    },
    Where {
        when: Box<Expr>,
        give: Box<Expr>,
        otherwise: Box<Expr>,
    },
    Larger(Vec<Expr>),
    Smaller(Vec<Expr>),
    SumOver {
        over: Search,
        body: Box<Expr>,
    },
    CountOf(Search),
    Any(Search),
    Every(Search),
    First {
        over: Search,
        give: Box<Expr>,
        failing: Box<Expr>,
    },
    Place(Search),
    Years {
        from: Box<Expr>,
        to: Box<Expr>,
    },
    Missing(String),
    /// A figure once more, and the facts that are taken otherwise for it.
    AsIf {
        name: String,
        changes: Vec<(String, Expr)>,
    },
    Pair {
        sign: Sign,
        left: Box<Expr>,
        right: Box<Expr>,
    },
    Rounded {
        of: Box<Expr>,
        way: Way,
        unit: Q,
        steps: bool,
    },
    Converted {
        of: Box<Expr>,
        by: String,
    },
    Charged {
        of: Box<Expr>,
        by: String,
    },
    Placed {
        of: Box<Expr>,
        on: String,
    },
    Compared {
        test: Test,
        left: Box<Expr>,
        right: Box<Expr>,
    },
    Not(Box<Expr>),
    And(Box<Expr>, Box<Expr>),
    Or(Box<Expr>, Box<Expr>),
}

/// A place in a list of tokens.
pub struct Reader {
    tokens: Vec<Token>,
    at: usize,
}

impl Reader {
    pub fn new(tokens: Vec<Token>) -> Reader {
        Reader { tokens, at: 0 }
    }

    pub fn peek(&self) -> &Token {
        &self.tokens[self.at]
    }

    pub fn next(&mut self) -> Token {
        let token = self.tokens[self.at].clone();
        self.at += 1;
        token
    }

    /// Takes a word if it is this one.
    pub fn take(&mut self, word: &str) -> bool {
        let found = matches!(self.peek(), Token::Word(w) if w == word);
        self.at += usize::from(found);
        found
    }

    pub fn take_sign(&mut self, sign: char) -> bool {
        let found = *self.peek() == Token::Sign(sign);
        self.at += usize::from(found);
        found
    }

    /// Takes this word, which must stand here.
    pub fn word(&mut self, word: &str) {
        assert!(
            self.take(word),
            "`{word}` should stand here, not {:?}",
            self.peek()
        );
    }

    pub fn sign(&mut self, sign: char) {
        assert!(
            self.take_sign(sign),
            "`{sign}` should stand here, not {:?}",
            self.peek()
        );
    }

    pub fn name(&mut self) -> String {
        match self.next() {
            Token::Word(word) => word,
            other => panic!("a name should stand here, not {other:?}"),
        }
    }

    pub fn text(&mut self) -> String {
        match self.next() {
            Token::Text(text) => text,
            other => panic!("a text should stand here, not {other:?}"),
        }
    }

    pub fn number(&mut self) -> Q {
        match self.next() {
            Token::Number(value) => value,
            other => panic!("a number should stand here, not {other:?}"),
        }
    }

    /// `expr`.
    pub fn expr(&mut self) -> Expr {
        let mut left = self.both();
        while self.take("or") {
            left = Expr::Or(Box::new(left), Box::new(self.both()));
        }
        left
    }

    fn both(&mut self) -> Expr {
        let mut left = self.denial();
        while self.take("and") {
            left = Expr::And(Box::new(left), Box::new(self.denial()));
        }
        left
    }

    fn denial(&mut self) -> Expr {
        if self.take("not") {
            Expr::Not(Box::new(self.denial()))
        } else {
            self.compared()
        }
    }

    fn compared(&mut self) -> Expr {
        let left = self.shaped();
        let test = if self.take("above") {
            Test::Above
        } else if self.take("below") {
            Test::Below
        } else if self.take("at") {
            if self.take("least") {
                Test::AtLeast
            } else {
                self.word("most");
                Test::AtMost
            }
        } else if self.take("is") {
            if self.take("not") {
                Test::IsNot
            } else {
                Test::Is
            }
        } else {
            return left;
        };
        Expr::Compared {
            test,
            left: Box::new(left),
            right: Box::new(self.shaped()),
        }
    }

    fn shaped(&mut self) -> Expr {
        let mut left = self.sum();
        loop {
            let of = Box::new(left.clone());
            left = if self.take("beyond") {
                Expr::Pair {
                    sign: Sign::Beyond,
                    left: of,
                    right: Box::new(self.sum()),
                }
            } else if self.take("limited") {
                self.word("to");
                Expr::Pair {
                    sign: Sign::LimitedTo,
                    left: of,
                    right: Box::new(self.sum()),
                }
            } else if self.take("raised") {
                self.word("to");
                Expr::Pair {
                    sign: Sign::RaisedTo,
                    left: of,
                    right: Box::new(self.sum()),
                }
            } else if self.take("rounded") {
                self.rounded(of)
            } else if self.take("converted") {
                self.word("by");
                Expr::Converted {
                    of,
                    by: self.name(),
                }
            } else if self.take("charged") {
                self.word("by");
                Expr::Charged {
                    of,
                    by: self.name(),
                }
            } else if self.take("placed") {
                self.word("on");
                Expr::Placed {
                    of,
                    on: self.name(),
                }
            } else {
                return left;
            };
        }
    }

    fn rounded(&mut self, of: Box<Expr>) -> Expr {
        let way = if self.take("up") {
            Way::Up
        } else if self.take("down") {
            Way::Down
        } else {
            self.word("half");
            if self.take("up") {
                Way::HalfUp
            } else if self.take("down") {
                Way::HalfDown
            } else {
                self.word("even");
                Way::HalfEven
            }
        };
        self.word("to");
        let mut unit = self.number();
        if self.take_sign('%') {
            unit /= q(100, 1);
        }
        assert!(!unit.is_zero(), "a unit is above zero");
        let mut steps = false;
        if self.take("as") {
            steps = self.take("steps");
            if !steps {
                self.word("a");
                self.word("slope");
            }
        }
        Expr::Rounded {
            of,
            way,
            unit,
            steps,
        }
    }

    /// `sum`.
    pub fn sum(&mut self) -> Expr {
        let mut left = self.product();
        loop {
            let sign = match self.peek() {
                Token::Sign('+') => Sign::Add,
                Token::Sign('-') => Sign::Subtract,
                _ => return left,
            };
            self.next();
            left = Expr::Pair {
                sign,
                left: Box::new(left),
                right: Box::new(self.product()),
            };
        }
    }

    fn product(&mut self) -> Expr {
        let mut left = self.value();
        loop {
            let sign = match self.peek() {
                Token::Sign('*') => Sign::Multiply,
                Token::Sign('/') => Sign::Divide,
                _ => return left,
            };
            self.next();
            left = Expr::Pair {
                sign,
                left: Box::new(left),
                right: Box::new(self.value()),
            };
        }
    }

    fn boxed_value(&mut self) -> Box<Expr> {
        Box::new(self.value())
    }

    fn with(&mut self) -> Option<Box<Expr>> {
        if !self.take("with") {
            return None;
        }
        self.sign('(');
        let inner = self.expr();
        self.sign(')');
        Some(Box::new(inner))
    }

    /// `KIND [ "with" … ]`.
    fn counted(&mut self) -> Search {
        let kind = self.name();
        Search {
            kind,
            by: String::new(),
            down: false,
            with: self.with(),
        }
    }

    /// `"by" NAME [ "down" ] [ "with" … ]`.
    fn ordered(&mut self, kind: String) -> Search {
        self.word("by");
        let by = self.name();
        let down = self.take("down");
        Search {
            kind,
            by,
            down,
            with: self.with(),
        }
    }

    fn list(&mut self, close: char) -> Vec<Expr> {
        let mut list = vec![self.expr()];
        while self.take_sign(',') {
            list.push(self.expr());
        }
        self.sign(close);
        list
    }

    pub fn value(&mut self) -> Expr {
        let word = match self.next() {
            Token::Number(value) => {
                if self.take_sign('%') {
                    return Expr::Number(value / q(100, 1));
                }
                self.take("hours");
                return Expr::Number(value);
            }
            Token::Day(day) => return Expr::Day(day),
            Token::Sign('(') => {
                let inner = self.expr();
                self.sign(')');
                return inner;
            }
            Token::Word(word) => word,
            other => panic!("a value should stand here, not {other:?}"),
        };
        match word.as_str() {
            "yes" => Expr::YesNo(true),
            "no" => Expr::YesNo(false),
            "money" => {
                let minus = self.take_sign('-');
                let value = if minus { -self.number() } else { self.number() };
                if self.take("a") || self.take("an") {
                    self.name();
                }
                Expr::Number(value)
            }
            "where" => {
                let when = Box::new(self.expr());
                self.word("give");
                let give = Box::new(self.expr());
                self.word("otherwise");
                Expr::Where {
                    when,
                    give,
                    otherwise: Box::new(self.expr()),
                }
            }
            "larger" | "smaller" => {
                self.word("of");
                self.sign('(');
                let list = self.list(')');
                if word == "larger" {
                    Expr::Larger(list)
                } else {
                    Expr::Smaller(list)
                }
            }
            "sum" => {
                self.word("over");
                let over = self.counted();
                self.word("of");
                Expr::SumOver {
                    over,
                    body: self.boxed_value(),
                }
            }
            "count" => {
                self.word("of");
                Expr::CountOf(self.counted())
            }
            "any" => Expr::Any(self.counted()),
            "every" => Expr::Every(self.counted()),
            "first" => {
                let kind = self.name();
                let over = self.ordered(kind);
                self.word("give");
                let give = self.boxed_value();
                self.word("failing");
                Expr::First {
                    over,
                    give,
                    failing: self.boxed_value(),
                }
            }
            "place" => Expr::Place(self.ordered(String::new())),
            "years" => {
                self.word("from");
                let from = self.boxed_value();
                self.word("to");
                Expr::Years {
                    from,
                    to: self.boxed_value(),
                }
            }
            "missing" => Expr::Missing(self.name()),
            _ if self.take("of") => {
                let whose = self.name();
                let failing = self.take("failing").then(|| self.boxed_value());
                Expr::Of {
                    name: word,
                    whose,
                    failing,
                }
            }
            _ if self.take("as") => {
                self.word("if");
                self.sign('(');
                let mut changes = Vec::new();
                loop {
                    let fact = self.name();
                    self.word("is");
                    changes.push((fact, self.value()));
                    if !self.take("and") {
                        break;
                    }
                }
                self.sign(')');
                Expr::AsIf {
                    name: word,
                    changes,
                }
            }
            _ if self.take_sign('[') => Expr::Lookup {
                table: word,
                keys: self.list(']'),
            },
            _ => Expr::Name(word),
        }
    }
}
