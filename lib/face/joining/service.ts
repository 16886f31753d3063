import { downloadCommands } from './by-hand'
import { AGENT_PORT, type Command, codeOf, FILE_NAME, type JoiningInput } from './types'

const FOLDER = '/opt/thinspan'
const STATE = '/var/lib/thinspan-agent'
export const SERVICE = 'thinspan-agent.service'
export const ENV_FILE = '/etc/thinspan-agent.env'

/**
 * The service unit. V8 makes code at run time, so MemoryDenyWriteExecute= is left out. A change that an upgrade waits
 * for ends with 10 and must be started again; what a person has to mend (2, 3, 4, 9) must not be, over and over.
 */
export const SERVICE_UNIT = `[Unit]
Description=Thinspan agent
Wants=network-online.target
After=network-online.target

[Service]
Type=notify
NotifyAccess=all
WatchdogSec=30
EnvironmentFile=${ENV_FILE}
Environment=THINSPAN_CONFIG=${STATE}/agent.json
ExecStart=/usr/bin/node ${FOLDER}/${FILE_NAME} run --enrol-if-needed
Restart=on-failure
RestartSec=5
RestartForceExitStatus=10
RestartPreventExitStatus=2 3 4 9
SuccessExitStatus=10

DynamicUser=yes
StateDirectory=thinspan-agent
StateDirectoryMode=0700
UMask=0077
ProtectSystem=strict
ProtectHome=yes
PrivateTmp=yes
PrivateDevices=yes
ProtectProc=invisible
ProtectClock=yes
ProtectHostname=yes
ProtectControlGroups=yes
ProtectKernelLogs=yes
ProtectKernelModules=yes
ProtectKernelTunables=yes
NoNewPrivileges=yes
CapabilityBoundingSet=
RestrictAddressFamilies=AF_INET AF_INET6 AF_UNIX AF_NETLINK
RestrictNamespaces=yes
RestrictRealtime=yes
RestrictSUIDSGID=yes
LockPersonality=yes
SystemCallArchitectures=native
SystemCallFilter=@system-service
SystemCallErrorNumber=EPERM
MemoryMax=256M
CPUQuota=20%
TasksMax=64

[Install]
WantedBy=multi-user.target
`

const UPGRADES = `[Service]
ExecStart=
ExecStart=/usr/bin/node ${STATE}/${FILE_NAME} run --enrol-if-needed --upgrades
`

export function serviceCommands(input: JoiningInput): Command[] {
  return [
    ...downloadCommands(input),
    {
      id: 'place',
      label: 'Put the file in its place',
      text: `sudo install -D -m 0644 ${FILE_NAME} ${FOLDER}/${FILE_NAME}`,
    },
    {
      id: 'environment',
      label: 'Say who it is; after it has joined, take the line with the code out',
      text: heredoc(ENV_FILE, environment(input), '0600'),
    },
    { id: 'unit', label: 'The unit', text: heredoc(`/etc/systemd/system/${SERVICE}`, SERVICE_UNIT, '0644') },
    {
      id: 'start',
      label: 'Start it, now and after every boot',
      text: `sudo systemctl daemon-reload\nsudo systemctl enable --now ${SERVICE}\nsystemctl status ${SERVICE}`,
    },
  ]
}

/** So that versions offered on the Upkeep page are taken: the file must then lie where the service may write. */
export function serviceUpgradeCommands(): Command[] {
  return [
    {
      id: 'upgrades',
      label: 'Take upgrades that the Upkeep page offers',
      text: [
        `sudo install -m 0644 ${FOLDER}/${FILE_NAME} ${STATE}/${FILE_NAME}`,
        `sudo chown --reference=${STATE}/agent.json ${STATE}/${FILE_NAME}`,
        heredoc(`/etc/systemd/system/${SERVICE}.d/upgrades.conf`, UPGRADES, '0644'),
        `sudo systemctl daemon-reload && sudo systemctl restart ${SERVICE}`,
      ].join('\n'),
    },
  ]
}

/** The settings of one agent as the service reads them. */
export function environment(input: JoiningInput): string {
  return [
    `THINSPAN_COLLECTOR=${input.origin}`,
    `THINSPAN_CODE=${codeOf(input)}`,
    'THINSPAN_NAME=NAME',
    `THINSPAN_LISTEN=0.0.0.0:${AGENT_PORT}`,
    `THINSPAN_ADDRESS=ws://HOST:${AGENT_PORT}`,
    `THINSPAN_NEIGHBOURS=ws://PEER:${AGENT_PORT}`,
    '',
  ].join('\n')
}

/** Written as root, whatever shell is used, and with its rights before anything stands in it. */
export function heredoc(path: string, text: string, mode: string, { expand = false } = {}): string {
  const end = expand ? 'END' : "'END'"
  return `sudo install -D -m ${mode} /dev/null ${path}\nsudo tee ${path} > /dev/null <<${end}\n${text}END`
}
